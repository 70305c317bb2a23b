/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures: the named numbers of a register, compiled into one calculation graph.
 *
 * A figure is (object, property, qualifiers, variant). Its name is made on demand:
 *     OBJECT.PROPERTY[.QUALIFIER[.QUALIFIER]][@CHANGE[+CHANGE...]]
 * docs/figures.md lists the properties. A change is an OPTION, an operating state
 * STATE=VALUE, or one that was made up: [NAME]. Behind @ stands the variant *projected* on
 * the object: only those changes that reach something that the object depends on. So a
 * figure that no change reaches is the base figure, and is computed once.
 *
 * A hazard that operating states reach is a mean over them (compile_states.c): a unit of
 * its own that reads one unit of the hazard for each combination of states.
 *
 * Every object is compiled into a section of its own, once for each projected variant,
 * when it is first asked for. After compiling, figures_evaluate fills in the values. */
#ifndef FIGURE_FIGURE_H
#define FIGURE_FIGURE_H

#include "eval/mean.h"
#include "graph/diagram.h"
#include "model/model.h"

/* Properties, the word in names, and what it is. */
#define FIGURE_PROPERTIES(X)                                                                       \
    X(VALUE, "value", "a named value")                                                             \
    X(RATE, "rate", "a rate per exposure and time")                                                \
    X(FAILS, "fails", "probability of failure to operate on demand")                               \
    X(ON_DEMAND, "on-demand", "probability of failure on demand, the same at all times")           \
    X(UNDETECTED, "undetected", "rate of failures that only a test or a demand shows")             \
    X(DETECTED, "detected", "rate of failures that supervision shows")                             \
    X(REPAIR, "repair", "time to repair once a failure is known")                                  \
    X(IN_REPAIR, "in-repair", "share of time in repair after detected failures")                   \
    X(IN_TEST, "in-test", "share of time out of service for routine tests")                        \
    X(OUT, "out-of-service", "share of time out of service for other reasons")                     \
    X(FINDS, "finds", "share of undetected failures that the routine test finds")                  \
    X(TESTED, "tested", "rate of undetected failures that the routine test finds")                 \
    X(UNTESTED, "untested", "rate of undetected failures that no routine test finds")              \
    X(REVEALED, "revealed", "how often demands and operations show whether it works")              \
    X(LEFT, "left-failed", "probability that a routine test leaves it failed")                     \
    X(TEST_COSTS, "test-costs", "cost of the routine tests per year")                              \
    X(STANDING, "standing", "probability of failure that does not change with time")               \
    X(COURSE, "course", "probability of failure over time: here at the start of the horizon")      \
    X(BETA, "beta", "share of failures with a common cause")                                       \
    X(UNWANTED, "unwanted",                                                                        \
      "how often an element or a scheme operates unwantedly by itself, and in tests")              \
    X(UNWANTED_PER_EVENT, "unwanted-per-event",                                                    \
      "probability of unwanted operation per event of a stress class")                             \
    X(ASSERTS, "asserts",                                                                          \
      "probability that an element which has not failed asserts itself in an event")               \
    X(AVAILABILITY, "availability",                                                                \
      "share of time in which no repair keeps a scheme from working")                              \
    X(UNAVAILABILITY, "unavailability",                                                            \
      "share of time in which repairs keep a scheme from working")                                 \
    X(FAILURE_FREQUENCY, "failure-frequency",                                                      \
      "how often a detected failure makes a scheme cease to work")                                 \
    X(OUTAGE_TIME, "outage-time",                                                                  \
      "mean time in which repairs keep a scheme from working, once they do")                       \
    X(FREQUENCY, "frequency", "how often a hazard, or one of its outcomes, occurs")                \
    X(END, "end", "probability of one end of the event tree, given the hazard")                    \
    X(PROBABILITY, "probability",                                                                  \
      "probability of an outcome, given the hazard; of a branch of chance, or a reading")          \
    X(SHARE, "share",                                                                              \
      "share of a branch, of the faults that a function sees, or of a kind of fault")              \
    X(CLEARANCE, "clearance-time", "clearance time of a row")                                      \
    X(DAMAGE, "damage",                                                                            \
      "mean damage of an outcome, of one item of it, or of a hazard's "                            \
      "damaging outcomes")                                                                         \
    X(DAMAGING, "damaging", "how often a hazard ends in an outcome with damage")                   \
    X(RISK, "risk", "frequency times damage, of an outcome or a hazard")                           \
    X(CUSTOMERS, "customers", "customers supplied from a site")                                    \
    X(LOAD, "load", "load supplied from a site, or that an outcome interrupts")                    \
    X(LASTS, "lasts", "how long an interruption of an outcome lasts")                              \
    X(PRESENT, "present", "probability that a given person of a group is there")                   \
    X(DIES, "death", "probability of death of a person who is there")                              \
    X(INJURED, "injury", "probability of injury of a person who is there")                         \
    X(INTERRUPTIONS, "interruptions", "customers interrupted in a year, for long (IEEE 1366)")     \
    X(MOMENTARY, "momentary-interruptions", "customers interrupted in a year, for a short time")   \
    X(CUSTOMER_TIME, "customer-time", "time without supply in a year, summed over customers")      \
    X(NOT_SUPPLIED, "energy-not-supplied", "energy not supplied in a year")                        \
    X(SAIFI, "saifi", "interruptions of a customer in a year (IEEE 1366)")                         \
    X(SAIDI, "saidi", "time without supply of a customer in a year (IEEE 1366)")                   \
    X(CAIDI, "caidi", "mean time of an interruption (IEEE 1366)")                                  \
    X(ASAI, "asai", "share of time in which a customer is supplied (IEEE 1366)")                   \
    X(MAIFI, "maifi", "momentary interruptions of a customer in a year (IEEE 1366)")               \
    X(BORNE, "borne", "risk as a perspective of the register bears it")                            \
    X(CATEGORY, "category", "part of the risk that is damage of one category, whoever bears it")   \
    X(DEATH, "individual-risk", "probability per year that a given person of a group dies")        \
    X(INJURY, "injury-risk", "probability per year that a given person of a group is injured")     \
    X(FATALITIES, "fatalities", "expected deaths in a group per year")                             \
    X(INVEST, "invest", "investment of an option")                                                 \
    X(RUNNING, "running", "running cost of an option per year")                                    \
    X(RESIDUAL, "residual", "what an option is worth at the end of the horizon")                   \
    X(DISCOUNT, "discount", "interest per year")                                                   \
    X(HORIZON_DAMAGE, "horizon-damage",                                                            \
      "expected damage over the horizon, summed and not discounted")                               \
    X(PRESENT_DAMAGE, "present-damage", "present value of the damage over the horizon")            \
    X(PRESENT_COST, "present-cost", "present value of investments and running cost")               \
    X(ANNUAL_COST, "equivalent-annual-cost", "the same cost each year of the horizon")             \
    X(TOTAL, "total", "present value of damage and cost together")                                 \
    X(NET, "net-present-value", "what an alternative is worth against doing nothing")              \
    X(BENEFIT, "benefit", "present value of the damage that an alternative avoids")                \
    X(AVOIDS, "avoids", "risk that an alternative avoids in a mean year, once in service")         \
    X(AVOIDED, "avoided", "damage that an alternative avoids in one year, not discounted")         \
    X(INVESTED, "invested", "what is invested in an alternative in one year, not discounted")      \
    X(CUMULATED, "cumulated",                                                                      \
      "present value of all that an alternative avoids less all that it "                          \
      "costs, until the end of a year")                                                            \
    X(AVOIDS_TIME, "avoids-customer-time",                                                         \
      "customer time without supply that an alternative avoids in a mean year")                    \
    X(AVOIDS_FATALITIES, "avoids-fatalities", "deaths that an alternative avoids in a mean year")  \
    X(PRESENT_TIME, "present-customer-time",                                                       \
      "customer time that an alternative avoids over the horizon, discounted")                     \
    X(PRESENT_FATALITIES, "present-fatalities",                                                    \
      "deaths that an alternative avoids over the horizon, discounted")                            \
    X(PER_HOUR, "cost-per-customer-hour", "present cost over the customer time that it avoids")    \
    X(PER_FATALITY, "net-cost-per-fatality",                                                       \
      "present cost less benefit, over the deaths that it avoids")                                 \
    X(DISPROPORTION, "disproportion",                                                              \
      "net cost over what society would spend on the deaths that it avoids; of the register: the " \
      "limit of that")                                                                             \
    X(FATALITY_WORTH, "per-fatality", "what society would spend to avoid one expected death")      \
    X(TO_COME, "to-come",                                                                          \
      "present value of what is to come from a point of a tree on, the best branches taken")       \
    X(BELIEF, "belief", "probability of a state as it is believed at a point of a tree")           \
    X(REACH, "reach", "probability of coming to a point of a tree, the best branches taken")       \
    X(BECOMES, "becomes", "how often a state becomes another one")                                 \
    X(PASSES, "passes",                                                                            \
      "probability of being in the second state some time behind being in the first")              \
    X(SPENDS, "spends", "share of that time that is spent in the second state")                    \
    X(BEGINS, "begins", "probability of a state at the beginning of a year")                       \
    X(READING_PRICE, "price-of-reading", "present value of what is paid before a reading")         \
    X(READING_WORTH, "worth-of-reading", "what a reading is worth before it is paid for")          \
    X(TOGETHER, "together", "what options are worth together beyond what each is worth alone")     \
    X(RATIO, "benefit-cost-ratio", "avoided damage over cost, as present values")

enum property {
#define X(property, word, help) PROPERTY_##property,
    FIGURE_PROPERTIES(X)
#undef X
        PROPERTY_COUNT
};
extern const struct property_info {
    const char *word, *help;
} properties[PROPERTY_COUNT];

typedef uint32_t figure_id;
#define FIGURE_NONE UINT32_MAX

/* Is it a probability or a share: between 0 and 1? And may a figure of the property have this
 * value: a probability, or what cannot be negative? Others may have any. */
bool property_is_probability(enum property p);
bool property_allows(enum property p, double x);

/* How something fails: at all times alike, or over time. */
struct behaviour {
    node_id node;       /* argument of diagrams: a number, or a COURSE */
    figure_id fails;    /* its mean over the horizon, or the long-run average */
    figure_id course;   /* FIGURE_NONE unless timed */
    bool timed;         /* it is a COURSE */
    bool dated;         /* it has a date of its own, or a part that is never tested */
    bool ages;          /* some part of it is never reset */
    struct course when; /* timed: years from the start of the horizon */
};

/* The time over which figures are averaged: see figure/span.h. */
struct span {
    struct windows windows;  /* n = 0: nothing changes with time */
    bool yearly;             /* windows are years of the horizon */
    uint32_t years;          /* of the horizon */
    const uint32_t *of_year; /* yearly: the window that holds in each */
    double from;             /* yearly: the beginning; its year is a window from there */
};

/* What an element shows to common causes and to the report. */
struct element_exports {
    struct behaviour whole; /* all of its failures, whatever their cause */
    /* Its parts, or NODE_NONE. The two rates are before any split by common causes. */
    node_id on_demand, undetected, detected, repair, finds, revealed, left;
    node_id other;     /* out of service, in test: never of a common cause; or NODE_NONE */
    node_id in_repair; /* share of time; or NODE_NONE */
    bool tested;
    double every; /* years between tests; 0: none */
    struct span span;
};

/* Failures that several elements have in common: one shock for each set of members. */
struct shock {
    const char *name; /* "CC.A.B" */
    size_t n;
    const char *const *members; /* in byte order */
    struct behaviour fails;
    node_id detected, in_repair; /* or NODE_NONE */
};
struct group_exports {
    size_t n;
    const struct shock *shocks;
};

struct figure {
    uint32_t unit; /* index of the compiled object in `units` */
    enum property property;
    const char *q1, *q2; /* qualifiers or NULL */
    node_id node;
    const char *source; /* id of the source, or NULL */
    const char *text;   /* of a leaf: how it was written ("90 % within ..."), or NULL */
};

enum change_sort { CHANGE_OPTION, CHANGE_RENEWAL, CHANGE_EARLY, CHANGE_STATE, CHANGE_MADE_UP };

struct change {
    enum change_sort sort;
    const char *name;          /* as in names of figures: "FIT", "FIT:2049", "FIT:early",
                                  "T2-OUT=a-out", "[test at 2 a]" */
    const char *state, *value; /* of a state */
    const struct node *node;   /* bound; NULL: changes nothing, or of an option */
    const char *option;        /* of a renewal or a commissioning period */
    double moved;              /* of a renewal: by how many years later than with the option as its
                                  dates say something is new */
};

/* A set of changes and the model that they make: that of options, states and what is made up, over
 * it the renewals, and over these the commissioning periods. A renewal or a commissioning period
 * stands only beside its option. */
struct variant {
    size_t n; /* changes: options, renewals, commissioning periods, then states, then those made up,
                 each in byte order of names */
    const struct change *changes;
    size_t n_options;
    const char *const *options; /* names of the first changes */
    const struct model *model;
    struct strmap *reached; /* for each change: ids of what it reaches by references */
    struct figures *figures;
    const struct variant *stem; /* without the states; itself where there are none */
    struct object_list varying; /* of a stem: states that vary */
    struct strmap *combined;    /* hazard -> struct combinations (states.h) */
    struct strmap *projections; /* id -> struct variant, where states vary */
};

/* The roots of one diagram as conditions, for formulas. */
struct conditions {
    node_id diagram;
    size_t n_events;
    const struct event *events;
    const char *const *texts; /* by root */
};

/* One compiled object, or a part of it. */
struct compiled {
    const struct object *object; /* of the variant; NULL for a decision's own section */
    const char *id;
    const struct variant *variant; /* projected */
    section_id section;
    figure_id first;
    size_t n;          /* figures */
    void *exports;     /* struct hazard_exports, element_exports, group_exports, ... by kind */
    figure_id main;    /* value, rate, fails, risk */
    uint32_t n_inputs; /* uncertain inputs of its own */
    const struct compiled *also;         /* another unit with figures of the same object, or NULL */
    const char *part;                    /* NULL: the main unit */
    ARRAY(struct conditions) conditions; /* of its diagrams, where `exports` does not tell */
};

struct figures {
    struct arena *arena;
    const struct model *base;
    const char *perspective;        /* NULL: every category */
    const struct names *categories; /* of the perspective; NULL: every category */
    day date;                       /* of evaluation: evidence accrues until then */
    bool whole_cycles; /* averages are over whole cycles of tests wherever they lie, and over the
                          horizon for what no test finds; set behind figures_new */
    struct graph *graph;
    struct eval *eval;
    struct means *means;
    const struct mean_source *source;
    bool points_only; /* figures are values at the means of what is unknown, not means: for who
                         compares two ways to the same value */
    ARRAY(struct figure) list;
    ARRAY(struct compiled *) units;
    struct strmap compiled_by_key; /* "ID@A+B" -> struct compiled */
    struct text key;               /* scratch: one of these keys */
    struct strmap variants;        /* "A+B" -> struct variant */
    struct strmap made_up;         /* "[NAME]" -> struct change */
    struct strmap responses;       /* hazard -> its DIAGRAM nodes (likeness.h) */
    struct strmap used_by;         /* id -> struct objects: what refers to it, in the base */
    struct strmap groups;          /* element -> struct groups: its common causes in the base */
    size_t n_indexed;              /* common causes of the base that are in `groups` */
    ARRAY(const struct quantity *) inputs;
    ARRAY(bool) input_varies; /* from one occurrence to the next, rather than being unknown */
    /* "VH-51A#0", "H-1/frequency#0": the same under all variants */
    ARRAY(const char *) input_names;
    ARRAY(figure_id) of_node;     /* first figure of a node */
    ARRAY(const char *) literals; /* text of a CONST node, or NULL */
    const struct diagram *itself; /* of one variable: true when it is */
    uint32_t n_stated;            /* expressions that documents state, each a node of its own */
    unsigned depth;
};

/* perspective: "all" or NULL for every category; otherwise it must exist
 * (OHMEN_UNKNOWN with the nearest name). date: of evaluation. */
ohmen_status figures_new(struct arena *a, const struct model *base, const char *perspective,
                         day date, struct figures **out, ohmen_error *e);

/* The variant of a set of options, in any order, and of their renewals ("FIT:2049", or
 * "FIT:2031-04-01" where an option is applied later than its dates say) and commissioning periods
 * ("FIT:early"). OHMEN_UNKNOWN for what is no option, has no such renewal or
 * period, or stands twice, OHMEN_COMPUTE when they contradict or leave the register wrong: the
 * message is the first diagnostic. */
ohmen_status figures_variant(struct figures *f, size_t n, const char *const *options,
                             const struct variant **out, ohmen_error *e);

/* The variant with a state fixed besides: "T2-OUT=a-out". OHMEN_UNKNOWN when there
 * is no such state, or another of its object is fixed already; OHMEN_COMPUTE as above. */
ohmen_status figures_variant_in(struct figures *f, const struct variant *base, const char *state,
                                const struct variant **out, ohmen_error *e);

/* The variant with a change besides that stands in no register, in the form of an option's
 * change. In names of figures it is [NAME]; NAME is not empty and has no `[` or `]`
 * (OHMEN_UNKNOWN), and one name is one change throughout (OHMEN_UNKNOWN otherwise).
 * OHMEN_COMPUTE for a change that cannot be read, and as figures_variant. */
ohmen_status figures_variant_with(struct figures *f, const struct variant *base, const char *name,
                                  const struct node *change, const struct variant **out,
                                  ohmen_error *e);

/* Does the variant change anything that this object depends on? */
bool variant_reaches(const struct variant *v, const char *id);

/* Compiles an object (value, rate, type, element, scheme, hazard, state that varies) under a
 * variant and everything that it depends on. A hazard is the mean over those operating states
 * that the variant does not fix; every other object is what the variant says, states that are
 * not fixed left out (but the frequency of a hazard, where it asks for that, is the mean).
 * OHMEN_COMPUTE names what this version cannot evaluate. */
ohmen_status figures_compile(struct figures *f, const struct variant *v, const char *id,
                             const struct compiled **out, ohmen_error *e);

/* Values of everything that was compiled so far. OHMEN_COMPUTE names the figure that is
 * not a finite number. */
ohmen_status figures_evaluate(struct figures *f, ohmen_error *e);

/* The mean over all that is unknown or varies (eval/mean.h). */
double figure_value(const struct figures *f, figure_id id);
/* Its standard error; 0 where nothing was sampled. */
double figure_error(const struct figures *f, figure_id id);
enum mean_method figure_method(const struct figures *f, figure_id id);
/* The value at the means of what is unknown: the same where the method is MEAN_EXACT. */
double figure_at_means(const struct figures *f, figure_id id);
struct dim figure_dim(const struct figures *f, figure_id id);
const struct figure *figure_at(const struct figures *f, figure_id id);
const char *figure_name(const struct figures *f, struct arena *a, figure_id id);

/* The figure of a unit by its property and qualifiers (NULL: none); FIGURE_NONE. */
figure_id compiled_figure(const struct figures *f, const struct compiled *u, enum property p,
                          const char *q1, const char *q2);

/* --- hazards --- */

/* A scheme works, or does not; with `sees_row` also: and its function sees the fault; with
 * `tripped_by` also: and the scheme of that name, its breakers and trip circuits taken as sound,
 * works (and, with `tripped_row`, sees the fault). */
struct condition {
    const struct condition *before;
    const char *id;
    const char *sees_row;
    const char *tripped_by, *tripped_row;
    bool works;
};

/* One end of the event tree. */
struct end {
    const struct condition *condition; /* newest first */
    const char *path;                  /* "never/fire" */
    const char *row;
    const char *outcome;           /* "none" or a key of the outcomes */
    size_t outcome_index;          /* SIZE_MAX for none */
    figure_id probability, damage; /* damage: of the outcome at this end's clearance time;
                                      FIGURE_NONE for none */
    uint32_t root;                 /* of the diagram */
};
/* A variable of a hazard's or a scheme's diagram. */
enum event_kind {
    EVENT_ELEMENT,  /* the element fails; of one with common causes: alone, by itself */
    EVENT_SHOCK,    /* elements fail together */
    EVENT_SEES,     /* true when the function of a row sees the fault */
    EVENT_DISABLED, /* the hazard puts an element out of action */
    EVENT_ASSERTS   /* true when a stress makes a sound element assert itself */
};
struct event {
    enum event_kind kind;
    const char *id;   /* of the element, the common cause, or the row */
    const char *name; /* in formulas, where it stands for its success (but sees.ROW) */
    struct behaviour fails;
};

/* A hazard in one combination of operating states. */
struct hazard_state {
    const char *name;            /* "T1-OUT=none+T2-OUT=a-out" */
    double share;                /* of time, as evaluated when it was compiled */
    node_id weight;              /* the same, in the section of the mean */
    const node_id *weight_in;    /* by year of the horizon; NULL: as `weight` in all */
    const struct compiled *unit; /* NULL: there is no such hazard in it */
};

/* Of a mean over operating states: diagram, variables and ends are those of the state with the
 * greatest share that has the hazard (the first of equals); all else is the mean. */
struct hazard_exports {
    size_t n_states; /* 0: no operating state reaches the hazard, or all are fixed */
    struct hazard_state *states;
    const struct diagram *diagram;
    node_id node; /* DIAGRAM */
    size_t n_events;
    const struct event *events; /* by variable */
    struct span span;
    /* Risk by year of the horizon: figures risk[of_year[y]], or one for all years. */
    size_t n_yearly;
    const figure_id *yearly;
    const uint32_t *of_year; /* NULL: yearly[0] holds in all */
    struct end *ends;
    size_t n_ends;
    const figure_id *end_in; /* yearly span: probability of end e in window w, [w * n_ends + e] */
    size_t n_outcomes;       /* as the keys of the hazard's outcomes */
    figure_id *probability, *frequency_of, *damage_of, *risk_of;
    figure_id frequency, damaging, damage, risk;
};

struct scheme_exports {
    const struct diagram *diagram; /* root 0: the scheme fails */
    node_id node;                  /* DIAGRAM */
    size_t n_events;
    const struct event *events;
    struct span span;
};

/* --- explaining --- */

/* The formula of a figure in terms of other figures and literals, such as
 * "H-BUS1.frequency * H-BUS1.probability.slow". Leaves give their literal. */
const char *figure_formula(struct figures *f, struct arena *a, figure_id id);

/* The figures that its formula names, in order, without repetition. */
struct figure_ids ARRAY_BODY(figure_id);
void figure_inputs(struct figures *f, struct arena *a, figure_id id, struct figure_ids *out);

/* Finds a figure by its name, compiling what is needed (of decisions: see
 * decide/weigh.h). OHMEN_UNKNOWN with the nearest name. */
ohmen_status figures_find(struct figures *f, const char *name, figure_id *out, ohmen_error *e);

/* A figure of a unit by the part of its name behind the object: "risk.slow". */
ohmen_status compiled_find(struct figures *f, const struct compiled *u, const char *rest,
                           figure_id *out, ohmen_error *e);

/* The register's own settings as a unit: register.discount. */
const struct compiled *figures_settings(struct figures *f);

/* --- what is not used --- */

/* Fields that are given but not evaluated by this version, as "H-1: growth" one line
 * an object, in order of kind and id. */
struct unused ARRAY_BODY(const char *);
void figures_unused(struct arena *a, const struct model *m, struct unused *out);

#endif
