/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Field tables of what may be done: states, options, decisions; and the table of
 * kinds. */
#include "model/tables.h"

#include "base/text.h"

#define SOURCE_FIELD(T)                                                                            \
    F(T, source, "source", REF, "Where the number comes from", .kinds = KIND_BIT(KIND_SOURCE),     \
      .flags = TRACE)
#define NOTE_FIELD(T) F(T, note, "note", TEXT, "Anything else")

static const struct field share_part =
    PART(QUANTITY, "Share of this state", .dim = PROBABILITY, .flags = REST | CERTAIN);
static const struct field change_part = PART(CHANGE, "A change");
static const struct field flow_part =
    PART(QUANTITY, "Transitions per year", .dim = FREQUENCY, .flags = NOT_NEGATIVE);
static const struct field flows_part = PART(ROWS, "Transitions to each state", .part = &flow_part);
static const struct field name_part = PART(NAME, "The state that it enters");
static const struct field names_part =
    PART(ROWS, "The state that each outcome leads to", .part = &name_part);
static const struct field reading_share =
    PART(QUANTITY, "Probability of each reading, in the order of reads", .dim = PROBABILITY,
         .flags = CERTAIN);
static const struct field readings_part =
    PART(LIST, "Probabilities of the readings", .part = &reading_share);

static const struct field reading_fields[] = {
    F(struct reading_test, reads, "reads", ORDERED, "What the test can read", .flags = REQUIRED),
    F(struct reading_test, given, "given", ROWS, "Probability of each reading, by state",
      .part = &readings_part, .flags = REQUIRED),
    F(struct reading_test, costs, "costs", QUANTITY, "What the test costs", .dim = MONEY,
      .flags = NOT_NEGATIVE),
};
static const struct table table_reading =
    TABLE(struct reading_test, "test of a state", reading_fields,
          "A survey that reads a state imperfectly");
static const struct field reading_part = PART(STRUCT, "A survey", .table = &table_reading);

static const struct group state_is_or_varies[] = {{true, {"is", "varies"}}};
static const struct field state_fields[] = {
    F(struct state, name, "name", TEXT, "What is in a state"),
    F(struct state, is, "is", ROWS, "Unknown states with their probabilities", .part = &share_part),
    F(struct state, varies, "varies", ROWS, "Operating states with their shares of time",
      .part = &share_part),
    F(struct state, when, "when", ROWS, "What a state changes in the register",
      .part = &change_part),
    F(struct state, becomes, "becomes", ROWS, "Transitions per year, from state to state",
      .part = &flows_part),
    F(struct state, failures, "failures", ROWS,
      "Outcomes of hazards behind which the asset is replaced or repaired",
      .part = &names_part, .kinds = KIND_BIT(KIND_HAZARD)),
    F(struct state, renewed_by, "renewed-by", ROWS, "Options that set the state",
      .part = &name_part, .kinds = KIND_BIT(KIND_OPTION)),
    F(struct state, tests, "tests", ROWS, "Surveys that read the state", .part = &reading_part),
    SOURCE_FIELD(struct state),
    NOTE_FIELD(struct state),
};
const struct table table_state =
    TABLE(struct state, "state", state_fields, "A condition that is unknown, or an operating state",
          GROUPS(state_is_or_varies));

const struct rows *state_values(const struct state *s)
{
    return s->is.n ? &s->is : &s->varies;
}

bool state_evolves(const struct state *s)
{
    return s->is.n && (s->becomes.n || s->failures.n);
}

const char *state_renewed(const struct state *s, const char *option)
{
    for (size_t i = 0; i < s->renewed_by.n; i++)
        if (text_equal(s->renewed_by.keys[i], option))
            return ((const char *const *)s->renewed_by.at)[i];
    return NULL;
}

static const struct field investment_fields[] = {
    F(struct investment, is, "is", QUANTITY, "What it costs", .dim = MONEY,
      .flags = REQUIRED | NOT_NEGATIVE),
    F(struct investment, on, "on", WHEN,
      "When it is paid; at the start of the horizon where it is left out"),
    SOURCE_FIELD(struct investment),
    NOTE_FIELD(struct investment),
};
static const struct table table_investment = TABLE(
    struct investment, "investment", investment_fields, "Money spent once", .short_key = "is");

static const struct field early_fields[] = {
    F(struct early, lasts, "for", QUANTITY, "How long the commissioning period lasts", .dim = TIME,
      .flags = REQUIRED | CERTAIN | CONSTANT | POSITIVE),
    F(struct early, change, "change", CHANGE, "What is different during it", .flags = REQUIRED),
};
static const struct table table_early =
    TABLE(struct early, "early period", early_fields, "The commissioning period of an option");
static const struct field amount_part =
    PART(QUANTITY, "How much", .dim = ANY, .flags = CERTAIN | CONSTANT | NOT_NEGATIVE);

static const struct field option_fields[] = {
    F(struct option, name, "name", TEXT, "What would be done", .flags = REQUIRED),
    F(struct option, site, "site", REF, "Where", .kinds = KIND_BIT(KIND_SITE), .flags = TRACE),
    F(struct option, owner, "owner", TEXT, "Who answers for it"),
    F(struct option, invest, "invest", STRUCT, "Investment", .table = &table_investment),
    F(struct option, in_service, "in-service", WHEN,
      "When its benefit starts; the start of the horizon where it is left out"),
    F(struct option, running, "running", STRUCT, "Running cost", .table = &table_money_rate),
    F(struct option, life, "life", QUANTITY, "How long it lasts from its in-service date",
      .dim = TIME, .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct option, renewed, "renewed", YES, "Is it renewed at the end of its life?"),
    F(struct option, residual, "residual", QUANTITY, "What it is worth at the end of the horizon",
      .dim = MONEY, .flags = NOT_NEGATIVE),
    F(struct option, early, "early", STRUCT, "Commissioning period", .table = &table_early),
    F(struct option, excludes, "excludes", REFS, "Options that cannot be combined with it",
      .kinds = KIND_BIT(KIND_OPTION)),
    F(struct option, requires, "requires", REFS, "Options without which it is not possible",
      .kinds = KIND_BIT(KIND_OPTION)),
    F(struct option, combine, "combine", ROWS, "What settles a contradiction with another option",
      .part = &change_part, .kinds = KIND_BIT(KIND_OPTION)),
    F(struct option, resources, "resources", ROWS, "What it needs beside money",
      .part = &amount_part, .flags = LATER),
    F(struct option, change, "change", CHANGE, "What it changes in the register",
      .flags = REQUIRED),
    SOURCE_FIELD(struct option),
    NOTE_FIELD(struct option),
};
const struct table table_option =
    TABLE(struct option, "option", option_fields, "A measure: what it costs and what it changes");

static const struct table table_step;
static const struct field step_part = PART(STRUCT, "A step", .table = &table_step);
static const struct field steps_part = PART(LIST, "Steps in time", .part = &step_part);
static const struct field fork_fields[] = {
    F(struct fork, p, "p", QUANTITY, "Probability, or rest", .dim = PROBABILITY,
      .flags = REQUIRED | REST | CERTAIN),
    F(struct fork, then, "then", LIST, "What follows", .part = &step_part),
};
static const struct table table_fork =
    TABLE(struct fork, "chance branch", fork_fields, "A branch of chance");
static const struct field fork_part = PART(STRUCT, "A chance", .table = &table_fork);

static const struct group step_kinds[] = {
    {true, {"pay", "wait", "apply", "change", "inspect", "choose", "chance", "go"}}};
static const struct field step_fields[] = {
    F(struct step, pay, "pay", QUANTITY, "Pay money", .dim = MONEY),
    F(struct step, wait, "wait", QUANTITY, "Let time pass", .dim = TIME,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct step, apply, "apply", REF, "Apply an option", .kinds = KIND_BIT(KIND_OPTION)),
    F(struct step, change, "change", CHANGE, "Change the register"),
    F(struct step, inspect, "inspect", TEXT, "Inspect: STATE.TEST"),
    F(struct step, reads, "reads", ROWS, "What follows each reading", .part = &steps_part),
    F(struct step, choose, "choose", ROWS, "Choose among alternatives", .part = &steps_part),
    F(struct step, chance, "chance", ROWS, "Chance decides", .part = &fork_part),
    F(struct step, go, "go", NAME, "Go on with a named subtree"),
};
static const struct table table_step =
    TABLE(struct step, "step", step_fields, "A step of a decision tree", GROUPS(step_kinds));

static const struct field decision_fields[] = {
    F(struct decision, question, "question", TEXT, "What is to be decided", .flags = REQUIRED),
    F(struct decision, owner, "owner", TEXT, "Who decides"),
    F(struct decision, review, "review", DATE, "When it is to be looked at again"),
    F(struct decision, focus, "focus", REFS, "The hazards that the question is about",
      .kinds = KIND_BIT(KIND_HAZARD), .flags = TRACE),
    F(struct decision, options, "options", REFS, "The options to weigh, beside doing nothing",
      .kinds = KIND_BIT(KIND_OPTION)),
    F(struct decision, choose, "choose", ROWS, "A tree of alternatives in several stages",
      .part = &steps_part),
    F(struct decision, subtrees, "subtrees", ROWS, "Named parts of the tree", .part = &steps_part),
    F(struct decision, every, "every", QUANTITY, "The choice comes again after this time",
      .dim = TIME, .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct decision, risk_tolerance, "risk-tolerance", QUANTITY,
      "Of exponential utility: the greater, the less a wide spread of damage counts", .dim = MONEY,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct decision, sees, "sees", REFS, "States that are known at each choice",
      .kinds = KIND_BIT(KIND_STATE)),
    F(struct decision, beliefs, "beliefs", COUNT,
      "Most beliefs about unknown states at one choice; 1000 where it is left out", .low = 1,
      .high = 1000000),
    NOTE_FIELD(struct decision),
};
static const struct group decision_forms[] = {{true, {"options", "choose"}}};
const struct table table_decision =
    TABLE(struct decision, "decision", decision_fields, "A question with its options or its tree",
          GROUPS(decision_forms));

const struct kind_info kinds[KIND_COUNT] = {
    [KIND_REGISTER] = {"register", "register", false, &table_register},
    [KIND_SOURCE] = {"source", "sources", false, &table_source},
    [KIND_SITE] = {"site", "sites", true, &table_site},
    [KIND_GROUP] = {"group", "groups", true, &table_group},
    [KIND_VALUE] = {"value", "values", true, &table_value},
    [KIND_RATE] = {"rate", "rates", true, &table_rate},
    [KIND_TYPE] = {"type", "types", true, &table_type},
    [KIND_ELEMENT] = {"element", "elements", true, &table_element},
    [KIND_COMMON_CAUSE] = {"common-cause", "common-cause", true, &table_common_cause},
    [KIND_SCHEME] = {"scheme", "schemes", true, &table_scheme},
    [KIND_HAZARD] = {"hazard", "hazards", true, &table_hazard},
    [KIND_STATE] = {"state", "states", true, &table_state},
    [KIND_OPTION] = {"option", "options", false, &table_option},
    [KIND_DECISION] = {"decision", "decisions", false, &table_decision},
    [KIND_PLAN] = {"plan", "plans", false, &table_plan},
};

enum kind kind_named(const char *name)
{
    for (int k = 0; k < KIND_COUNT; k++)
        if (text_equal(kinds[k].name, name))
            return (enum kind)k;
    return KIND_COUNT;
}

enum kind kind_of_section(const char *section)
{
    for (int k = 0; k < KIND_COUNT; k++)
        if (text_equal(kinds[k].section, section))
            return (enum kind)k;
    return KIND_COUNT;
}

static const char *article(const char *noun)
{
    return noun[0] == 'e' || noun[0] == 'o' ? "an" : "a";
}

const char *kinds_words(struct arena *a, unsigned set)
{
    struct text t;
    text_init(&t, a);
    for (int k = 0; k < KIND_COUNT; k++) {
        if (!(set & KIND_BIT(k)))
            continue;
        set &= ~KIND_BIT(k);
        text_printf(&t, "%s%s %s",
                    t.n == 0   ? ""
                    : set == 0 ? " or "
                               : ", ",
                    article(kinds[k].name), kinds[k].name);
    }
    return text_str(&t);
}
