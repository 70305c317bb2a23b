/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How bad it may get (loss.h): the register as it is, or each alternative of a decision; and the
 * command that prints it. Owns nothing. */
#include "work/loss.h"

#include <math.h>

#include "figure/horizon.h"
#include "report/number.h"

/* Alternatives in the table beside doing nothing, and lines of the curve. */
enum { MOST_SHOWN = 8, MOST_LINES = 4 };
/* Half a bracket that is less than this part of its middle is not told by itself. */
static const double NARROW = 0.005;
/* A probability of no damage that is told in a sentence. */
static const double LEAST_TOLD = 0.001;

/* --- what is found --- */

static struct known_loss *new_loss(struct job *j, const char *owner)
{
    struct known_loss *x = NEW(j->arena, struct known_loss);
    x->owner = owner;
    x->horizon = horizon_length(j->model->settings);
    strmap_set(j->arena, &j->losses, owner, x);
    return x;
}

/* The cases have been compiled. */
static void find_world(struct job *j, struct known_loss *x, ohmen_status status, ohmen_error *why)
{
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, why);
    if (status == OHMEN_OK)
        status = loss_world_new(j->figures, j->arena, x->n, x->cases, &j->plan, &x->world, why);
    if (status != OHMEN_OK)
        x->why = arena_str(j->arena, why->text);
    x->results = NEW_ARRAY(j->arena, x->n, const struct loss_result *);
}

struct known_loss *loss_of_decision(struct job *j, const struct weighing *w)
{
    struct known_loss *x = strmap_get(&j->losses, w->id);
    ohmen_error why = OHMEN_ERROR_INIT;
    if (x)
        return x;
    x = new_loss(j, w->id);
    x->n = w->alternatives.n;
    ohmen_status status = loss_of_weighing(j->figures, (struct weighing *)w, &x->cases, &why);
    find_world(j, x, status, &why);
    return x;
}

struct known_loss *loss_of_hazards(struct job *j, const struct hazards *h)
{
    struct known_loss *x = strmap_get(&j->losses, LOSS_REGISTER);
    ohmen_error why = OHMEN_ERROR_INIT;
    if (x)
        return x;
    x = new_loss(j, LOSS_REGISTER);
    x->n = 1;
    ohmen_status status = loss_of_register(j->figures, h->n, h->at, &x->cases, &why);
    find_world(j, x, status, &why);
    return x;
}

const struct loss_result *loss_result_of(struct job *j, struct known_loss *x, size_t k)
{
    if (!x->results[k]) {
        struct loss_result *r = NEW(j->arena, struct loss_result);
        loss_find_case(x->world, j->arena, &x->cases[k], r);
        x->results[k] = r;
    }
    return x->results[k];
}

/* --- which cases are shown --- */

struct shown {
    struct job *job;
    struct known_loss *of;
    size_t n;
    size_t *cases;      /* the best first */
    const char **words; /* what they are called */
    size_t n_left_out;
    const struct weighing *w; /* NULL: the register */
};

/* Doing nothing, single options, and the best ones, at most MOST_SHOWN beside doing nothing. */
static struct shown shown_of(struct job *j, struct known_loss *x, const struct weighing *w)
{
    size_t n = w ? w->alternatives.n : 1;
    struct shown s = {.job = j, .of = x, .w = w, .cases = NEW_ARRAY(j->arena, n, size_t)};
    s.words = NEW_ARRAY(j->arena, n, const char *);
    for (size_t i = 0, others = 0; i < n; i++) {
        size_t k = w ? w->order[i] : 0;
        bool nothing = w && w->alternatives.at[k].n == 0;
        if (w && !nothing && others == MOST_SHOWN) {
            s.n_left_out++;
            continue;
        }
        others += !nothing;
        s.words[s.n] = w ? alternative_words(&w->alternatives.at[k]) : LOSS_TODAY;
        s.cases[s.n++] = k;
    }
    return s;
}

static const struct loss_result *result_at(const struct shown *s, size_t i)
{
    return loss_result_of(s->job, s->of, s->cases[i]);
}

/* --- words --- */

bool loss_is_probability(enum loss_kind kind)
{
    return kind == LOSS_NONE;
}

static const char *money(struct job *j, double x)
{
    return money_text(j->arena, x, j->model->settings->currency);
}

static const char *percent(struct job *j, double x)
{
    char number[32];
    return arena_printf(j->arena, "%s %%", number_text(number, x, STYLE_PERCENT));
}

const char *loss_sample_words(struct job *j, const struct known_loss *x)
{
    const struct sampling *s = loss_world_sample(x->world);
    if (!s)
        return "nothing unknown";
    return arena_printf(j->arena,
                        "%zu samples in %zu independent sets of %zu scrambled points, "
                        "seed %llu",
                        s->sets * s->points, s->sets, s->points, (unsigned long long)j->plan.seed);
}

/* "With 1 % probability ...": of one case. */
static const char *worst_words(struct job *j, const struct loss_result *r)
{
    return arena_printf(j->arena, "%s; in the worst 1 %% it is %s on average",
                        money(j, loss_middle(&r->at[LOSS_EXCEEDED_1])),
                        money(j, loss_middle(&r->at[LOSS_WORST_1])));
}

/* Who it is about, and the first word of what is said. */
static const char *begin_words(const struct shown *s, size_t k, const char *lower,
                               const char *capital)
{
    const struct alternative *x = s->w ? &s->w->alternatives.at[k] : NULL;
    if (!x)
        return capital;
    return arena_printf(s->job->arena, "%s: %s", x->n ? x->name : "Doing nothing", lower);
}

/* " There is none with 12 %.": where that is worth telling. */
static const char *none_words(struct job *j, const struct loss_result *r)
{
    double none = loss_middle(&r->at[LOSS_NONE]);
    if (none < LEAST_TOLD)
        return "";
    return arena_printf(j->arena, " With %s there is none.", percent(j, none));
}

static const char *sentence_of(const struct shown *s, size_t k)
{
    struct job *j = s->job;
    const struct loss_result *r = loss_result_of(j, s->of, k);
    if (r->step == 0)
        return arena_printf(j->arena, "%s outcome does damage that counts.",
                            begin_words(s, k, "no", "No"));
    return arena_printf(j->arena, "%s 1 %% probability the damage over %g a exceeds %s.%s",
                        begin_words(s, k, "with", "With"), s->of->horizon, worst_words(j, r),
                        none_words(j, r));
}

/* Doing nothing first, then the best alternative. */
static void sentences(const struct shown *s)
{
    struct report *r = s->job->report;
    report_note(r, "damage-sentence", "%s", sentence_of(s, 0));
    if (s->w && s->w->order[0] != 0)
        report_note(r, "damage-best", "%s", sentence_of(s, s->w->order[0]));
}

/* --- the table --- */

static const struct loss_column {
    const char *key, *head;
    unsigned keep;
} columns[LOSS_KINDS] = {
    [LOSS_NONE] = {"no-damage", "No damage", 3},
    [LOSS_EXCEEDED_10] = {"exceeded-10", "10 % exceed", 2},
    [LOSS_EXCEEDED_5] = {"exceeded-5", "5 % exceed", 1},
    [LOSS_EXCEEDED_1] = {"exceeded-1", "1 % exceed", 0},
    [LOSS_WORST_5] = {"worst-5", "Mean of worst 5 %", 1},
    [LOSS_WORST_1] = {"worst-1", "Mean of worst 1 %", 0},
};

static void add_column(struct job *j, struct block *b, const char *key, const char *head,
                       enum loss_kind kind, bool data)
{
    bool share = loss_is_probability(kind);
    struct column *c =
        block_column(j->report, b, key, head, share ? "%" : j->model->settings->currency,
                     share ? STYLE_PERCENT : STYLE_MONEY);
    c->data = data;
    if (!data && columns[kind].keep)
        c->keep = columns[kind].keep;
}

/* The ends and the standard error go into data alone. */
static void ends_columns(struct job *j, struct block *b, enum loss_kind kind)
{
    static const char *const words[][2] = {
        {"low", "Lower end of"}, {"high", "Upper end of"}, {"error", "Standard error of"}};
    for (size_t i = 0; i < sizeof words / sizeof *words; i++)
        add_column(j, b, arena_printf(j->arena, "%s-%s", columns[kind].key, words[i][0]),
                   arena_printf(j->arena, "%s %s", words[i][1], columns[kind].key), kind, true);
}

static void table_columns(struct job *j, struct block *b, bool alternatives)
{
    block_column(j->report, b, "case", alternatives ? "Alternative" : "Register", "", STYLE_PLAIN);
    block_column(j->report, b, "mean", "Mean", j->model->settings->currency, STYLE_MONEY);
    for (int k = 0; k < LOSS_KINDS; k++)
        add_column(j, b, columns[k].key, columns[k].head, (enum loss_kind)k, false);
    for (int k = 0; k < LOSS_KINDS; k++)
        ends_columns(j, b, (enum loss_kind)k);
}

static void table_row(const struct shown *s, struct block *b, size_t i)
{
    struct job *j = s->job;
    const struct loss_result *r = result_at(s, i);
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, s->words[i]);
    figure_cell(j, row, r->of->expected);
    for (int k = 0; k < LOSS_KINDS; k++)
        row_number(j->report, row, loss_middle(&r->at[k]),
                   loss_name(j->arena, s->of->owner, (enum loss_kind)k, r->of->name));
    for (int k = 0; k < LOSS_KINDS; k++) {
        row_number(j->report, row, r->at[k].low, NULL);
        row_number(j->report, row, r->at[k].high, NULL);
        row_number(j->report, row, r->at[k].error, NULL);
    }
}

static void table(const struct shown *s)
{
    struct job *j = s->job;
    struct block *b = report_table(
        j->report, "bad-ends",
        arena_printf(j->arena, "Damage over %g a, summed and not discounted", s->of->horizon));
    table_columns(j, b, s->w != NULL);
    for (size_t i = 0; i < s->n; i++)
        table_row(s, b, i);
}

/* --- the curve --- */

static void curve_line(const struct shown *s, struct block *b, size_t i)
{
    static const char *const symbols[MOST_LINES] = {"*", "o", "+", "x"};
    const struct loss_result *r = result_at(s, i);
    struct curve_line *line =
        curve_add_line(s->job->report, b, s->words[i], symbols[b->curve->lines.n]);
    for (size_t k = 0; k < r->curve.n; k++)
        curve_add_point(s->job->report, line, r->curve.at[k].damage,
                        (r->curve.at[k].low + r->curve.at[k].high) / 2);
}

static bool any_damage(const struct shown *s)
{
    for (size_t i = 0; i < s->n; i++)
        if (result_at(s, i)->step > 0)
            return true;
    return false;
}

/* The best ones, and doing nothing. */
static void curve(const struct shown *s)
{
    struct job *j = s->job;
    if (!any_damage(s))
        return;
    struct block *b = report_curve(j->report, "exceedance",
                                   "Probability that the damage over the horizon is exceeded");
    curve_set_x(j->report, b, "damage", "Damage", j->model->settings->currency, STYLE_MONEY);
    curve_set_y(j->report, b, "probability", "Exceeded with probability", "", STYLE_PROBABILITY)
        ->log = true;
    for (size_t i = 0; i < s->n; i++) {
        bool nothing = !s->w || s->w->alternatives.at[s->cases[i]].n == 0;
        if (result_at(s, i)->step > 0 && (nothing || b->curve->lines.n + 1 < MOST_LINES))
            curve_line(s, b, i);
    }
}

/* --- notes --- */

/* The widest half bracket of what is shown, and the greatest standard error, of money, as parts of
 * their middles. */
struct widest {
    double bracket, error;
    bool is_drawn, is_below_zero;
};

static struct widest widest_of(const struct shown *s)
{
    struct widest x = {0};
    for (size_t i = 0; i < s->n; i++) {
        const struct loss_result *r = result_at(s, i);
        x.is_drawn = x.is_drawn || r->is_drawn;
        x.is_below_zero = x.is_below_zero || r->is_below_zero;
        for (int k = LOSS_EXCEEDED_10; k < LOSS_KINDS; k++) {
            double middle = loss_middle(&r->at[k]);
            if (!(middle > 0))
                continue;
            x.bracket = fmax(x.bracket, (r->at[k].high - r->at[k].low) / 2 / middle);
            x.error = fmax(x.error, r->at[k].error / middle);
        }
    }
    return x;
}

static void note_words(const struct shown *s)
{
    struct job *j = s->job;
    report_note(
        j->report, "bad-ends-words",
        "Damage of all outcomes, each of which may occur never, once or more often, added up over "
        "the horizon; what varies is drawn anew at each occurrence. It is not discounted, so that "
        "its mean is not the present value. Damage counted: %s.%s",
        perspective_words(j),
        s->w ? " Only hazards that are weighed here are in it, the same for all alternatives."
             : "");
}

static void note_errors(const struct shown *s)
{
    struct job *j = s->job;
    struct widest x = widest_of(s);
    const char *ends = x.bracket < NARROW
                           ? arena_printf(j->arena, "within %s", percent(j, NARROW))
                           : arena_printf(j->arena, "within %s", percent(j, x.bracket));
    const char *sampled = "";
    if (loss_world_sample(s->of->world))
        sampled = arena_printf(j->arena,
                               " What is unknown comes from %s; standard errors are at "
                               "most %s of a number.",
                               loss_sample_words(j, s->of), percent(j, x.error));
    report_note(j->report, "bad-ends-errors",
                "Means are computed. Amounts are rounded down and up to a lattice; the middle of "
                "both ends is printed, which are %s of it.%s",
                ends, sampled);
    if (x.is_drawn)
        report_note(j->report, "bad-ends-drawn",
                    "Some damage of an occurrence is not a plain sum of what varies in it, or "
                    "has an unknown factor: it was drawn %d times, and is not bracketed.",
                    LOSS_DRAWS);
    if (x.is_below_zero)
        report_note(j->report, "bad-ends-below-zero",
                    "Some damage of an occurrence may be below 0 as it is stated; it was taken as "
                    "0.");
    if (s->n_left_out)
        report_note(j->report, "bad-ends-left-out", "%s that rank below these are not shown.",
                    count_words(j->arena, s->n_left_out, "alternative", "alternatives"));
}

/* --- the parts --- */

static void part_shown(struct job *j, struct known_loss *x, const struct weighing *w)
{
    if (x->why) {
        report_note(j->report, "damage-sentence", "How bad it may get cannot be told: %s.", x->why);
        return;
    }
    struct shown s = shown_of(j, x, w);
    sentences(&s);
    table(&s);
    curve(&s);
    note_words(&s);
    note_errors(&s);
}

void part_loss(struct job *j, const struct weighing *w)
{
    part_shown(j, loss_of_decision(j, w), w);
    part_utility(j, w);
}

void part_loss_register(struct job *j, const struct hazards *h)
{
    part_shown(j, loss_of_hazards(j, h), NULL);
}

/* --- the use case --- */

static ohmen_status run_register(struct job *j, ohmen_error *e)
{
    struct hazards all = {0};
    ohmen_status status = job_compile_hazards(j, &all, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    report_heading(j->report, 1, "How bad it may get");
    part_loss_register(j, &all);
    part_not_computed(j);
    return OHMEN_OK;
}

static ohmen_status run_decision(struct job *j, const char *decision, ohmen_error *e)
{
    struct weighing *w = NULL;
    ohmen_status status = weigh_ranked(j->figures, decision, &w, e);
    if (status != OHMEN_OK)
        return status;
    report_heading(j->report, 1, arena_printf(j->arena, "%s: %s", w->id, w->decision->question));
    part_loss(j, w);
    return OHMEN_OK;
}

static ohmen_status run_damage(struct job *j, void *ctx, ohmen_error *e)
{
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = ctx ? run_decision(j, ctx, e) : run_register(j, e);
    if (status != OHMEN_OK)
        return status;
    part_unused(j);
    part_cautions(j);
    return OHMEN_OK;
}

ohmen_status ohmen_damage(ohmen_register *r, const ohmen_query *q, const char *decision,
                          ohmen_report **out, ohmen_error *e)
{
    if (q && q->site)
        return error_set(e, OHMEN_USAGE,
                         "how bad it may get is told of the whole register or of a decision: it "
                         "takes no site");
    return job_do(r, STORE_READ, q, run_damage, (void *)decision, out, e);
}
