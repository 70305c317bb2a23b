/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the use cases share: one job, from an open register to a report.
 *
 * Every public function runs as a job in an arena of its own, which the report then
 * owns: the connection to the file is opened in it, so that running out of memory
 * anywhere closes everything. Private to src/work. */
#ifndef WORK_WORK_H
#define WORK_WORK_H

#include "decide/elasticity.h"
#include "decide/information.h"
#include "decide/lean.h"
#include "decide/sure.h"
#include "decide/swing.h"
#include "decide/turn.h"
#include "figure/supply.h"
#include "ohmen/ohmen.h"
#include "report/block.h"
#include "store/store.h"

struct ohmen_register {
    struct arena *arena;
    const struct mem *mem; /* that all its jobs draw from; NULL: mem_system */
    const char *path;
    ohmen_mode mode;
    ohmen_progress *progress; /* or NULL */
    void *progress_ctx;
    ohmen_stop *stop; /* or NULL */
    void *stop_ctx;
};

struct ohmen_report {
    struct arena *arena;
    struct report report;
    ARRAY(const char *) diagnostics;
    const char *text; /* of an export */
    jmp_buf guard;    /* of the writers */
};

/* What is worked out from figures and is none of the graph, for explaining. */
struct consumed {
    const char *name, *words, *formula;
    double value; /* in base units of dim */
    struct dim dim;
    struct figure_ids inputs; /* that the formula names */
};

/* What cannot be evaluated, and why. */
struct not_computed {
    const char *id, *why;
};

struct job {
    struct arena *arena;
    const struct ohmen_register *reg;
    const char *path;
    struct store *store;
    uint64_t at; /* entry that is looked at */
    ohmen_query query;
    day date;                     /* of evaluation */
    struct store_objects objects; /* as of `at` */
    struct model *model;
    struct figures *figures;
    const struct variant *base;
    ARRAY(struct not_computed) not_computed; /* hazards and decisions without figures */
    struct sampling_plan plan;               /* of what is sampled: job_load_figures */
    struct figure_ids together; /* sums over the register that share a sample (spreads.c) */
    struct {
        size_t done, all; /* samples of single figures, for who watches; all 0: there is one */
        size_t batches, points; /* once it was interrupted: what was asked for */
    } sampled;
    /* By decision, once they were asked for: struct turns (turn.c), struct known_sure (sure.c),
     * struct known_swings (swings.c), struct known_loss (loss.c, and of the register), struct
     * known_information (information.c). */
    struct strmap turns, sures, swings, losses, informations;
    struct ohmen_report *out;
    struct report *report; /* &out->report */
    bool interrupted;      /* the sampling, by who was asked whether to stop */
    bool keep_report;      /* the report goes out although the job fails */
};

/* ohmen_open with a seam for memory, borrowed for the life of the register. */
ohmen_status register_open(const struct mem *mem, const char *path, ohmen_mode mode,
                           ohmen_register **out, ohmen_error *e);

/* Runs `run` as a job and hands out its report. query may be NULL. */
typedef ohmen_status job_run(struct job *j, void *ctx, ohmen_error *e);
ohmen_status job_do(ohmen_register *r, enum store_mode mode, const ohmen_query *query, job_run *run,
                    void *ctx, ohmen_report **out, ohmen_error *e);

/* Tells whoever watches the register. */
void job_progress(const struct job *j, const char *phase, size_t done, size_t total);
/* Between two steps of a phase: tells him, and whether to go on: not once he has asked to stop. */
bool job_goes_on(struct job *j, const char *phase, size_t done, size_t total);

/* Steps of a job, each including those before it. */
ohmen_status job_load_objects(struct job *j, ohmen_error *e); /* at, objects */
ohmen_status job_load_model(struct job *j, ohmen_error *e);   /* model */
ohmen_status job_load_figures(struct job *j, ohmen_error *e); /* figures, base */

/* Compiles every hazard that the query asks for, in byte order of ids. One that this
 * version cannot evaluate is left out and noted in not_computed. */
struct hazards ARRAY_BODY(const struct compiled *);
ohmen_status job_compile_hazards(struct job *j, struct hazards *out, ohmen_error *e);

/* The plan of samples that the query asks for (plan.c). OHMEN_USAGE. */
ohmen_status job_find_plan(struct job *j, ohmen_error *e);
/* What a sample was: "1024 samples in 16 independent sets of 64 scrambled points, seed 1". */
const char *sampling_words(struct job *j, const struct sampling *s);

/* The site that the query asks for must exist. */
ohmen_status job_check_site(struct job *j, ohmen_error *e);

/* Is the site (NULL: none) the one that the query asks for, or inside it? Always, where it
 * asks for none. */
bool job_at_site(const struct job *j, const char *site);
/* The same of an object: a site by itself, others by their field; always, where its kind has no
 * such field. */
bool job_has_at_site(const struct job *j, const struct object *o);

/* Notes an object that cannot be evaluated (OHMEN_COMPUTE), and goes on; any other status is
 * handed on. */
ohmen_status job_leave_out(struct job *j, const char *id, ohmen_status status,
                           const ohmen_error *why, ohmen_error *e);

/* The canonical node of a stored object. */
ohmen_status job_node(struct job *j, const struct store_object *o, struct node **out,
                      ohmen_error *e);

/* "section/id". */
const char *job_path(struct arena *a, enum kind kind, const char *id);

/* --- parts of reports (parts.c) --- */

const char *object_name(const struct object *o); /* its name, title or question; "" */
const char *unit_per_year(struct job *j);        /* "EUR/a" */
/* Whose damage counts: "every category", "what society bears". */
const char *perspective_words(struct job *j);

/* Behind the figures, for it says what is not among them. */
void part_title_block(struct job *j, ohmen_error *e);
void part_signatures(struct job *j);
void part_hazards(struct job *j, const struct hazards *h);
void part_hazard_grid(struct job *j, const struct hazards *h);
/* What is left out because it cannot be evaluated, and why; nothing when all could. */
void part_not_computed(struct job *j);
/* Notes: fields that are stored but not used, figures that are not linear in what is
 * unknown, and the usual cautions. */
void part_unused(struct job *j);
void part_linearity(struct job *j, const struct hazards *h);
void part_cautions(struct job *j);

/* What objects lack to be kept alive (gaps.c): a row each; and counted by what is lacking, as a
 * chapter of the report. */
void part_gaps(struct job *j);
void part_gaps_counted(struct job *j);

#define HOURS_PER_YEAR 8760.

/* All of a weighing that `weigh` and the report print, without the grid; and its parts. They rank
 * it where that has not been done (weigh_rank) only in part_weighing and part_weighing_grid. */
void part_weighing(struct job *j, struct weighing *w);
/* Decisions in several stages (branching.c). What is best, and what follows then, in a sentence or
 * two; what follows alone, "" for nothing. */
const char *branching_sentence(struct job *j, const struct weighing *w);
const char *branching_plan(struct job *j, const struct weighing *w);
/* The tree or the policy, what readings are worth and what to do after them. */
void part_branching(struct job *j, const struct weighing *w);
/* Customer time and deaths over the horizon, where there are any. */
void part_branching_effects(struct job *j, const struct weighing *w);
/* How far "how sure" and "what would turn it" hold for it. */
void part_branching_sure(struct job *j, const struct weighing *w);
void part_branching_turn(struct job *j);
/* What its memo recommends, in notes. */
void part_branching_recommendation(struct job *j, const struct weighing *w);
/* The options that it applies anywhere, in byte order. */
struct branching;
struct applied_options ARRAY_BODY(const char *);
void branching_options(struct arena *a, const struct branching *b, struct applied_options *out);
void part_alternatives(struct job *j, const struct weighing *w);
void part_options(struct job *j, const struct weighing *w);
void part_weighed_hazards(struct job *j, const struct weighing *w);
/* How present values are taken, in a sentence. */
void part_conventions(struct job *j);
/* Net present value and rank by perspective; nothing where there are not two. */
void part_worth_by_perspective(struct job *j, const struct weighing *w);
/* What combinations are worth beyond the sum of their options. */
void part_together(struct job *j, const struct weighing *w);
/* Customer hours, deaths, the risk of a person; nothing where no alternative changes any. */
void part_customers_and_people(struct job *j, const struct weighing *w);
/* Outcomes that hold much of the risk: how often now, and with the best alternative. */
void part_endings(struct job *j, const struct weighing *w);
/* The three of them that hold the greatest risk, in words. */
const char *endings_sentence(struct job *j, const struct weighing *w);
/* What is best to perspectives for which the best alternative is not; "" where it is for all. */
const char *perspectives_sentence(struct job *j, const struct weighing *w);
/* Hazards outside the focus that the best alternative changes; "" where there are none. */
const char *outside_focus_sentence(struct job *j, const struct weighing *w);
/* Whether the best alternative leaves people with a risk above what is tolerable; "" else. */
const char *people_sentence(struct job *j, const struct weighing *w);
/* The alternative that avoids more deaths than the best one at the least disproportion: what each
 * costs beyond it, and whether that is gross (HSE, Reducing risks, protecting people, 2001, from
 * memory); "" without such a one, or where the register does not state what a death is worth. */
const char *further_sentence(struct job *j, const struct weighing *w);
/* The greatest risk of a person of the weighed groups under an alternative; *group: whose. There
 * is at least one group. */
double worst_individual_risk(const struct job *j, const struct weighing *w,
                             const struct alternative *x, size_t *group);
/* A number in a sentence: three significant digits. */
const char *plain_text(struct job *j, double x);
void part_weighing_grid(struct job *j, struct weighing *w);
/* An alternative in words: "do nothing" or the ids of its options; as a noun "doing nothing". */
const char *alternative_words(const struct alternative *x);
const char *alternative_noun(const struct alternative *x);
/* One sentence: what is best, and what it is worth. */
const char *weighing_sentence(struct job *j, const struct weighing *w);

/* What would turn the decision, a stated quantity at a time: a table of the nearest, and how many
 * more there are. The weighing is ranked. */
void part_turn(struct job *j, struct weighing *w);
/* One sentence: the nearest of these. */
const char *turn_sentence(struct job *j, const struct weighing *w);

/* The derivation of one of them: what it is, and how it was found; its formula, and the figures
 * that this names. */
void part_turn_head(struct job *j, const struct turn *t);
void part_turn_method(struct job *j, const struct turn *t);
struct consumed turn_consumed(struct job *j, const struct turn *t);

/* How sure the answer is, over all that is unknown (sure.c). The weighing is ranked. A sentence, ""
 * where doing nothing is the only alternative; a table of the alternatives, nothing where all is
 * certain; both; and the inputs that it moves with. Where nothing can be sampled the sentence says
 * why. */
const char *sure_sentence(struct job *j, const struct weighing *w);
void part_sure_table(struct job *j, const struct weighing *w);
void part_sure(struct job *j, const struct weighing *w);
void part_sure_moves(struct job *j, const struct weighing *w);

/* The sample of the decision, of which there is one a job; NULL where nothing can be sampled, or
 * doing nothing is the only alternative. */
const struct sure *known_sure(struct job *j, const struct weighing *w);

/* "12.3 %"; a standard error, of which more than two digits say nothing (sure.c). */
const char *percent_words(struct job *j, double x);
double two_digits(double x);

/* The derivation of one of these numbers. */
void part_sure_head(struct job *j, const struct sure_value *v);
void part_sure_method(struct job *j, const struct sure_value *v);
struct consumed sure_consumed(struct job *j, const struct sure_value *v);

/* How bad it may get (loss.c): of each alternative of a weighing, which is ranked, and of hazards
 * as they are: sentences, a table, a curve. figures_evaluate has been called. */
void part_loss(struct job *j, const struct weighing *w);
void part_loss_register(struct job *j, const struct hazards *h);
/* What finding something out before deciding is worth (information.c). The weighing is ranked. A
 * sentence, "" where doing nothing is the only alternative or nothing is unknown; with the few
 * quantities that are worth most as a table; with all that are worth something. */
const char *information_sentence(struct job *j, struct weighing *w);
void part_information_briefly(struct job *j, struct weighing *w);
void part_information_table(struct job *j, struct weighing *w);
void part_information(struct job *j, struct weighing *w);
void part_information_head(struct job *j, const struct information_value *v);
void part_information_method(struct job *j, const struct information_value *v);
struct consumed information_consumed(struct job *j, const struct information_value *v);

/* The alternative whose worth is looked at: the best one; where that is to do nothing the best
 * option, NULL where there is none (swings.c). */
const struct alternative *judged_alternative(const struct weighing *w);
/* The two inputs with the widest swings, first of those that turn the decision, then of the others;
 * those that there are not stay as they were. */
void widest_inputs(struct job *j, const struct weighing *w, const char *out[2]);
/* What each unknown input swings, as a picture; elasticities, as a table. Of that alternative;
 * nothing where there is none. */
void part_swings(struct job *j, const struct weighing *w);
void part_elasticities(struct job *j, const struct weighing *w);
void part_swing_head(struct job *j, const struct swing_value *v);
void part_swing_method(struct job *j, const struct swing_value *v);
struct consumed swing_consumed(struct job *j, const struct swing_value *v);
void part_elasticity_head(struct job *j, const struct elasticity *x);
struct consumed elasticity_consumed(struct job *j, const struct elasticity *x);

/* Which alternative is best by two inputs (both NULL: widest_inputs). OHMEN_UNKNOWN and
 * OHMEN_COMPUTE, as map_find, only for inputs that were asked for (map.c). */
ohmen_status part_map(struct job *j, const struct weighing *w, const char *x, const char *y,
                      ohmen_error *e);

/* The best alternative year by year; nothing where that is to do nothing. It is ranked. */
void part_flow(struct job *j, struct weighing *w);
/* When an alternative that is not doing nothing has paid for itself. */
const char *payback_sentence(struct job *j, struct weighing *w, const struct alternative *x);

/* What a decision rests on: inputs by how much they move it, and their sources. It is ranked. */
void part_rests_on(struct job *j, const struct weighing *w);
/* The derivation of one such movement. */
void part_lean_head(struct job *j, const struct lean *x);
struct consumed lean_consumed(struct job *j, const struct lean *x);

/* What the figure belongs to, by its name; the register's own settings by what they are. */
const char *figure_subject(const struct job *j, figure_id id);

/* A value in a unit that people read: s, min, h or a for times, kWh for energy; otherwise
 * base units. Returns the unit's name. */
const char *display_unit(struct job *j, struct dim d, double value, double *shown);

/* How its value is printed in that unit. */
enum number_style figure_style(struct job *j, figure_id id);

/* The same for a figure: a stated quantity is shown in the unit that its author used, customer
 * time in hours. */
const char *figure_display(struct job *j, figure_id id, double *shown);

/* That unit, and a value of the figure, which need not be its own, in it. */
const char *figure_unit(struct job *j, figure_id id);
double figure_shown(struct job *j, figure_id id, double value);

/* A value of a figure, which need not be its own, in words with that unit. */
const char *figure_words(struct job *j, figure_id id, double value);

/* Where a figure comes from: its source, that of the figure that it merely repeats, "none" for
 * a leaf without one, "" for a formula. */
const char *figure_source(struct job *j, figure_id id);

/* Indices of values by falling value; ties in their order. */
size_t *falling_order(struct arena *a, size_t n, const double *values);
/* Hazards by falling risk; ties by id. */
size_t *hazards_by_risk(struct job *j, const struct hazards *h);
/* A cell with a figure in base units; empty for FIGURE_NONE. */
void figure_cell(struct job *j, struct row *row, figure_id id);
/* An effect of a hazard over the horizon, whose effects have been compiled; FIGURE_NONE. */
figure_id hazard_effect(struct job *j, const struct compiled *hazard, enum property p,
                        const char *of);

/* --- criteria (criteria.c) --- */

/* Criteria lines of the register for a grid; only those whose scope is a hazard. */
void part_criteria_lines(struct job *j, struct block *grid);
/* The place of a risk of a hazard, of a site or of the register among the criteria:
 * "acceptable", "tolerable", "intolerable"; "" without criteria of this scope. */
const char *criteria_word(const struct job *j, enum scope scope, double risk);
/* " By the register's criteria that is tolerable (acceptable below ...).", or "". */
const char *criteria_sentence(struct job *j, enum scope scope, double risk);
/* The same for an individual risk, and the limits in words; "" without limits. */
const char *people_word(const struct job *j, double individual_risk);
const char *people_limit_words(struct job *j);

/* --- perspectives.c, supply.c, people.c: compile, figures_evaluate, then the parts --- */

struct perspectives {
    const struct hazards *hazards;
    struct accounts sums; /* of the register, or of the site that is asked for */
};
ohmen_status perspectives_compile(struct job *j, const struct hazards *h, struct perspectives *p,
                                  ohmen_error *e);
/* Risk by perspective and by category of damage, as tables. */
void part_perspectives(struct job *j, const struct perspectives *p);

struct site_row {
    const struct object *site;
    struct site_sums sums;
};
struct supply_part {
    const struct hazards *hazards;
    bool any;                     /* does some hazard interrupt somebody? */
    struct supply sums;           /* of the register, or of the site that is asked for */
    ARRAY(struct site_row) sites; /* that have hazards */
};
ohmen_status supply_compile(struct job *j, const struct hazards *h, struct supply_part *s,
                            ohmen_error *e);
void part_supply(struct job *j, const struct supply_part *s);
void part_sites(struct job *j, const struct supply_part *s);

struct people_part {
    const struct hazards *hazards; /* all of the register */
    bool any;                      /* does some hazard harm somebody? */
    struct harm_to *groups;        /* as the groups of the model */
};
ohmen_status people_compile(struct job *j, const struct hazards *h, struct people_part *p,
                            ohmen_error *e);
void part_people(struct job *j, const struct people_part *p);

/* --- what objects say (nodes.c) --- */

/* A node in one line: a scalar's text, or its flow form, without the outer brackets; cut at
 * `most` columns. */
const char *node_says(struct arena *a, const struct node *n, size_t most);

/* A text, or what of it fits into `most` columns, with dots. The result may be the text. */
const char *brief(struct arena *a, const char *text, size_t most);

/* What a document says of an object: a map of its fields, in the order of their table. */
const struct node *object_document(struct arena *a, const struct object *o);

/* "Common cause": what an object of the kind is called, with a capital letter. */
const char *kind_title(struct arena *a, enum kind kind);

/* "1 entry", "3 entries". */
const char *count_words(struct arena *a, uint64_t n, const char *one, const char *many);

/* --- differences (differences.c) --- */

/* Rows of the differences between two versions of an object, both not NULL. */
void part_differences(struct job *j, struct block *table, const char *lead,
                      const struct node *before, const struct node *after);
/* The table that part_differences fills; its first column holds the leads. */
struct block *part_difference_table(struct job *j, const char *key, const char *title,
                                    const char *lead_key, const char *lead_head);

#endif
