/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Protection in time: figures of random registers against probabilities over time that are
 * written here from the definitions (figure/span.h, the heads of element.c and common_cause.c),
 * enumerated over all sets of failed elements at each instant, and averaged by adaptive
 * quadrature in long double between all resets. */
#include <math.h>

#include "figure_test.h"
#include "formula.h"
#include "loaded.h"
#include "quadrature.h"
#include "timed_world.h"

enum { SETS = 1 << TW_ELEMENTS, EVENTS = 80, WINDOWS = 16 };

static struct {
    size_t figures, yearly, cycles, shocks;
} met;

/* --- events --- */

/* What makes the elements of `mask` fail. */
struct happening {
    unsigned mask;
    struct formula_course c;
    bool timed, dated, ages;
};

struct oracle {
    const struct timed_world *w;
    long double frequency[WINDOWS], mean_frequency; /* by year */
    size_t n;
    struct happening event[EVENTS];
};

static long double years_to(const struct timed_world *w, struct tw_date d)
{
    static const int before[] = {0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334};
    bool leap = d.year % 4 == 0;
    int days = before[d.month - 1] + (leap && d.month > 2) + d.day - 1;
    return d.year - w->start + days / 365.0L;
}

static bool is_later(struct tw_date p, struct tw_date q)
{
    if (p.year != q.year)
        return p.year > q.year;
    return p.month != q.month ? p.month > q.month : p.day > q.day;
}

static long double both(long double p, long double q)
{
    return p == 1 || q == 1 ? 1 : p + q - p * q;
}

struct growing {
    long double growth, today;
};

static void grown_by(void *ctx, long double t, long double *out)
{
    const struct growing *g = ctx;
    *out = powl(1 + g->growth, t - g->today);
}

/* The mean of (1 + g)^t over a year, t from the day of evaluation. */
static long double growth_in(const struct timed_world *w, double growth, int year)
{
    struct growing g = {growth, years_to(w, (struct tw_date){2026, 12, 1})};
    long double sum = 0;
    quadrature_add(grown_by, &g, 1, year, year + 1, &sum);
    return sum;
}

static void fill_frequencies(struct oracle *o)
{
    const struct timed_world *w = o->w;
    for (int y = 0; y < w->years; y++) {
        o->frequency[y] = 1.5L * w->rate;
        o->frequency[y] *= w->rate_growth ? growth_in(w, w->rate_growth, y) : 1;
        o->frequency[y] *= w->growth ? growth_in(w, w->growth, y) : 1;
        o->mean_frequency += o->frequency[y] / w->years;
    }
}

/* Instants of an element: its dates and its test. */
static void set_instants(const struct oracle *o, size_t element, struct happening *h)
{
    const struct tw_element *x = &o->w->element[element];
    struct tw_date sound = is_later(x->known, x->since) ? x->known : x->since;
    struct formula_course *c = &h->c;
    long double every = x->months / 12.0L, base = 0;
    h->dated = sound.year || x->last.year || x->next.year;
    c->fresh = sound.year || !x->months;
    if (sound.year)
        base = c->born = years_to(o->w, sound);
    if (x->last.year && !is_later(sound, x->last)) {
        base = years_to(o->w, x->last);
        c->fresh = false;
    } else if (x->next.year && !sound.year) {
        base = fminl(years_to(o->w, x->next) - every, 0);
    }
    c->tested = x->months > 0;
    c->every = every;
    if (c->tested) {
        long double today = years_to(o->w, (struct tw_date){2026, 12, 1});
        c->first = base + every;
        while (h->dated && c->first <= today + 1e-9L) /* not on the day of evaluation itself */
            c->first += every;
        if (x->next.year)
            c->first = fmaxl(years_to(o->w, x->next), base);
    }
    c->from = fminl(base, 0);
    c->born = fminl(c->born, 0);
}

static struct tw_rates rates_of(const struct timed_world *w, size_t element)
{
    const struct tw_element *x = &w->element[element];
    struct tw_rates r = x->own;
    if (x->type == TW_TYPES)
        return r;
    const struct tw_rates *t = &w->type[x->type];
    r.per_demand = r.per_demand < 0 ? t->per_demand : r.per_demand;
    r.undetected = r.undetected < 0 ? t->undetected : r.undetected;
    r.detected = r.detected < 0 ? t->detected : r.detected;
    r.repair_h = r.repair_h < 0 ? t->repair_h : r.repair_h;
    return r;
}

/* Undetected failures at `rate`, of which the test of `element` finds its share; `standing` and
 * the instants are there. */
static void set_undetected(const struct oracle *o, size_t element, long double rate, bool is_alone,
                           struct happening *h)
{
    const struct tw_element *x = &o->w->element[element];
    struct formula_course *c = &h->c;
    bool revealed = x->exercised >= 0 || x->revealed_by;
    long double finds = !c->tested ? 0 : x->finds < 0 ? 1 : (long double)x->finds;
    c->ending = (x->exercised >= 0 ? x->exercised : 0) + (x->revealed_by ? o->mean_frequency : 0);
    c->left = is_alone && c->tested && x->leaves >= 0 ? x->leaves : 0;
    bool rests = rate >= 0 && (!c->tested || x->finds >= 0);
    rate = fmaxl(rate, 0);
    c->rate = rate * finds;
    c->unreset = rests ? rate * (1 - finds) : 0;
    if (rests && (o->w->steady || (!h->dated && revealed))) {
        long double always = c->unreset > 0 ? c->unreset / (c->unreset + c->ending) : 0;
        c->standing = both(c->standing, always);
        c->unreset = 0;
        rests = false;
    }
    h->timed = c->tested || rests;
    h->ages = rests;
    h->dated = h->dated || rests;
}

/* An element of these parts (below 0: it has none). */
static struct happening element_of(const struct oracle *o, size_t i, long double per_demand,
                                   long double undetected, long double detected)
{
    const struct tw_element *x = &o->w->element[i];
    struct happening h = {.mask = 1u << i};
    set_instants(o, i, &h);
    if (per_demand >= 0)
        h.c.standing = both(h.c.standing, per_demand);
    if (detected >= 0 && !x->plant_out)
        h.c.standing =
            both(h.c.standing, detected * (long double)rates_of(o->w, i).repair_h / 8760);
    if (x->out >= 0)
        h.c.standing = both(h.c.standing, x->out);
    if (x->months && x->takes_h >= 0)
        h.c.standing = both(h.c.standing, (long double)x->takes_h / (730 * x->months));
    set_undetected(o, i, undetected, true, &h);
    return h;
}

/* --- common causes --- */

static long double choose(size_t n, size_t k)
{
    return k == 0 ? 1 : choose(n - 1, k - 1) * n / k;
}

/* IEC 61508-6:2010, table D.5, as differences: what k of m have in common, in all sets of k. */
static long double beta_of(size_t k, size_t m)
{
    static const double factor[6][7] = {[2] = {[2] = 1},
                                        [3] = {[2] = 1.5, [3] = 0.5},
                                        [4] = {[2] = 1.75, [3] = 0.6, [4] = 0.3},
                                        [5] = {[2] = 2, [3] = 0.8, [4] = 0.4, [5] = 0.2}};
    return ((long double)factor[m][k] - factor[m][k + 1]) / choose(m, k);
}

static long double share_of(const struct tw_cause *c, size_t k, double beta)
{
    long double total = 0;
    if (c->beta >= 0)
        return beta < 0 ? -1 : beta * beta_of(k, c->n);
    for (size_t i = 0; i < c->n; i++)
        total += (i + 1) * (long double)c->factor[i];
    long double alpha = c->factor[k - 1] / choose(c->n - 1, k - 1);
    return c->staggered ? alpha : k * alpha / total;
}

enum part { ON_DEMAND, UNDETECTED, DETECTED, PARTS };

static double part_of(const struct tw_rates *r, enum part p)
{
    return p == ON_DEMAND ? r->per_demand : p == UNDETECTED ? r->undetected : r->detected;
}

/* Of the shock that hits the members in `set` (bits by place): below 0 where there is none. */
static long double shock_part(const struct oracle *o, const struct tw_cause *c, unsigned set,
                              enum part p)
{
    size_t k = 0;
    long double least = INFINITY, logs = 0;
    for (size_t i = 0; i < c->n; i++) {
        struct tw_rates r = rates_of(o->w, c->member[i]);
        long double x = part_of(&r, p);
        if (!(set >> i & 1))
            continue;
        if (x < 0)
            return -1;
        least = fminl(least, x);
        logs += logl(x);
        k++;
    }
    long double share = share_of(c, k, p == DETECTED ? c->beta_detected : c->beta);
    return share < 0 ? -1 : fminl(share * expl(logs / k), least);
}

static size_t finder_of(const struct oracle *o, const struct tw_cause *c)
{
    if (c->found_by < c->n)
        return c->member[c->found_by];
    size_t best = c->member[0];
    for (size_t i = 1; i < c->n; i++) {
        int mine = o->w->element[c->member[i]].months, other = o->w->element[best].months;
        if (mine && (!other || mine < other))
            best = c->member[i];
    }
    return best;
}

static bool shock_of(const struct oracle *o, const struct tw_cause *c, unsigned set,
                     struct happening *h)
{
    long double p[PARTS], slowest = 0;
    bool plant_out = false;
    for (enum part k = 0; k < PARTS; k++)
        p[k] = shock_part(o, c, set, k);
    *h = (struct happening){0};
    for (size_t i = 0; i < c->n; i++)
        if (set >> i & 1) {
            h->mask |= 1u << c->member[i];
            slowest = fmaxl(slowest, rates_of(o->w, c->member[i]).repair_h);
            plant_out = plant_out || o->w->element[c->member[i]].plant_out;
        }
    if (p[0] < 0 && p[1] < 0 && p[2] < 0)
        return false;
    size_t finder = finder_of(o, c);
    set_instants(o, finder, h);
    h->c.tested = h->c.tested && !(c->settings && c->found_by == c->n);
    h->c.standing = p[ON_DEMAND] < 0 ? 0 : p[ON_DEMAND];
    if (p[DETECTED] >= 0 && !plant_out)
        h->c.standing = both(h->c.standing, p[DETECTED] * slowest / 8760);
    set_undetected(o, finder, p[UNDETECTED], false, h);
    h->timed = h->timed && p[UNDETECTED] >= 0;
    return true;
}

/* --- all events --- */

static void add_alone(struct oracle *o, size_t i)
{
    struct tw_rates r = rates_of(o->w, i);
    long double rest[PARTS];
    for (enum part p = 0; p < PARTS; p++) {
        rest[p] = part_of(&r, p);
        for (size_t k = 0; k < o->w->n_causes && rest[p] >= 0; k++) {
            const struct tw_cause *c = &o->w->cause[k];
            for (unsigned set = 1; set < 1u << c->n; set++) {
                bool hit = false;
                for (size_t m = 0; m < c->n; m++)
                    hit = hit || (set >> m & 1 && c->member[m] == i);
                if (hit && (set & (set - 1)))
                    rest[p] -= fmaxl(shock_part(o, c, set, p), 0);
            }
            rest[p] = fmaxl(rest[p], 0);
        }
    }
    o->event[o->n++] = element_of(o, i, rest[ON_DEMAND], rest[UNDETECTED], rest[DETECTED]);
}

static void fill_events(struct oracle *o)
{
    for (size_t i = 0; i < o->w->n_elements; i++)
        add_alone(o, i);
    for (size_t k = 0; k < o->w->n_causes; k++) {
        const struct tw_cause *c = &o->w->cause[k];
        for (unsigned set = 1; set < 1u << c->n; set++)
            if ((set & (set - 1)) && shock_of(o, c, set, &o->event[o->n]))
                o->n++;
    }
}

/* --- averages --- */

/* n values that depend on which elements have failed: value[set][i]. */
struct wanted {
    const struct oracle *o;
    unsigned reach; /* elements that matter */
    size_t n;
    bool disables;
    long double value[SETS][TW_ENDS];
    long double mean[WINDOWS][TW_ENDS]; /* by year; or one, the average of a cycle */
    bool yearly;
};

static bool matters(const struct wanted *x, const struct happening *h)
{
    return (h->mask & x->reach) != 0;
}

/* Probabilities of all sets of failed elements, event after event. */
static void at_time(void *ctx, long double t, long double *out)
{
    const struct wanted *x = ctx;
    long double p[SETS] = {1};
    size_t sets = (size_t)1 << x->o->w->n_elements;
    for (size_t i = 0; i < x->o->n + x->o->w->n_elements; i++) {
        bool disabling = i >= x->o->n;
        unsigned mask = disabling ? 1u << (i - x->o->n) : x->o->event[i].mask;
        if (!(mask & x->reach) ||
            (disabling && (!x->disables || x->o->w->disabled[i - x->o->n] < 0)))
            continue;
        long double q = disabling ? (long double)x->o->w->disabled[i - x->o->n]
                                  : formula_course_at(&x->o->event[i].c, t);
        for (size_t s = sets; s-- > 0;) {
            long double hit = p[s] * q;
            p[s] -= hit;
            p[s | mask] += hit;
        }
    }
    for (size_t k = 0; k < x->n; k++) {
        out[k] = 0;
        for (size_t s = 0; s < sets; s++)
            out[k] += p[s] * x->value[s][k];
    }
}

static void average(struct wanted *x, long double from, long double to, long double *mean)
{
    for (size_t k = 0; k < x->n; k++)
        mean[k] = 0;
    for (long double t = from, next; t < to; t = next) {
        next = to;
        for (size_t i = 0; i < x->o->n; i++) {
            const struct formula_course *c = &x->o->event[i].c;
            if (!c->tested || !matters(x, &x->o->event[i]))
                continue;
            long double r = c->first;
            while (r <= t + 1e-12L)
                r += c->every;
            next = fminl(next, r);
        }
        quadrature_add(at_time, x, x->n, t, next, mean);
    }
    for (size_t k = 0; k < x->n; k++)
        mean[k] /= to - from;
}

static int common_months(int a, int b)
{
    int x = a;
    while (x % b)
        x += a;
    return x;
}

/* Over each year of the horizon, or over a common cycle. */
static void fill_means(struct wanted *x)
{
    const struct oracle *o = x->o;
    bool timed = false, dated = false;
    long double behind = 0;
    int months = 1;
    for (size_t i = 0; i < o->n; i++) {
        const struct happening *h = &o->event[i];
        if (!matters(x, h) || !h->timed)
            continue;
        timed = true;
        dated = dated || h->dated;
        if (h->c.tested)
            months = common_months(months, (int)(h->c.every * 12 + 0.5L));
        if (h->dated && h->c.tested)
            behind = fmaxl(behind, h->c.first);
    }
    x->yearly = timed && dated && !o->w->steady;
    met.yearly += x->yearly;
    met.cycles += timed && !x->yearly;
    if (!timed)
        at_time(x, 0, x->mean[0]);
    else if (!x->yearly)
        average(x, behind, behind + months / 12.0L, x->mean[0]);
    for (int y = 0; x->yearly && y < o->w->years; y++)
        average(x, y, y + 1, x->mean[y]);
}

/* --- structures --- */

static bool works(const struct timed_world *w, size_t name, unsigned failed, bool trips)
{
    if (name < TW_ELEMENTS) {
        const struct tw_element *x = &w->element[name];
        bool breaker = x->breaker || (x->type < TW_TYPES && w->type_is_breaker[x->type]);
        return (trips && breaker) || !(failed >> name & 1);
    }
    const struct tw_scheme *s = &w->scheme[name - TW_ELEMENTS];
    size_t n = 0;
    for (size_t i = 0; i < s->n; i++)
        n += works(w, s->of[i], failed, trips);
    return n >= s->k;
}

static unsigned reach_of(const struct timed_world *w, size_t name)
{
    if (name < TW_ELEMENTS)
        return 1u << name;
    const struct tw_scheme *s = &w->scheme[name - TW_ELEMENTS];
    unsigned mask = 0;
    for (size_t i = 0; i < s->n; i++)
        mask |= reach_of(w, s->of[i]);
    return mask;
}

/* --- the event tree --- */

struct tree_ends {
    size_t n, outcome[TW_ENDS];
    const char *path[TW_ENDS];
};

/* Each row has one end, or two in the order of its branches. */
static struct tree_ends ends_of(const struct timed_world *w)
{
    static const char *const branches[][2] = {
        [TW_SPLIT] = {".x", ".y"}, [TW_QUESTION] = {".yes", ".no"}};
    struct tree_ends e = {0};
    for (size_t i = 0; i <= w->n_rows; i++) {
        const struct tw_row *r = &w->row[i];
        const char *name = i < w->n_rows ? arena_printf(w->arena, "r%zu", i) : "never";
        for (size_t k = 0; k < (r->kind == TW_OUTCOME ? 1u : 2u); k++) {
            const char *branch = r->kind == TW_OUTCOME ? "" : branches[r->kind][k];
            e.path[e.n] = arena_printf(w->arena, "%s%s", name, branch);
            e.outcome[e.n++] = r->outcome[k];
        }
    }
    return e;
}

/* Does row i clear, when the functions of the rows in `seen` see the fault? */
static bool clears(const struct timed_world *w, size_t i, unsigned failed, unsigned seen)
{
    const struct tw_row *r = &w->row[i];
    if (!(seen >> i & 1) || !works(w, r->cleared_by, failed, false))
        return false;
    return r->backs_up == TW_ROWS ||
           (seen >> r->backs_up & 1 && works(w, w->row[r->backs_up].cleared_by, failed, true));
}

/* Adds the chance of what the functions see to the end that is reached. */
static void respond(const struct timed_world *w, unsigned failed, unsigned seen, long double p,
                    long double *end)
{
    size_t at = 0, i = 0;
    while (i < w->n_rows && !clears(w, i, failed, seen))
        at += w->row[i++].kind == TW_OUTCOME ? 1 : 2;
    const struct tw_row *r = &w->row[i];
    if (r->kind == TW_SPLIT) {
        end[at] += p * r->share;
        end[at + 1] += p * (1 - (long double)r->share);
    } else {
        end[at + (r->kind == TW_QUESTION && !works(w, r->question, failed, false))] += p;
    }
}

static void tree_values(const struct timed_world *w, struct wanted *x)
{
    for (unsigned failed = 0; failed < 1u << w->n_elements; failed++)
        for (unsigned seen = 0; seen < 1u << w->n_rows; seen++) {
            long double p = 1;
            for (size_t i = 0; i < w->n_rows; i++) {
                long double sees = w->row[i].sees < 0 ? 1 : (long double)w->row[i].sees;
                p *= seen >> i & 1 ? sees : 1 - sees;
            }
            if (p > 0)
                respond(w, failed, seen, p, x->value[failed]);
        }
    for (size_t i = 0; i <= w->n_rows; i++) {
        x->reach |= i < w->n_rows ? reach_of(w, w->row[i].cleared_by) : 0;
        x->reach |= w->row[i].kind == TW_QUESTION ? reach_of(w, w->row[i].question) : 0;
    }
}

/* --- comparing --- */

struct seen_time {
    const struct timed_world *w;
    struct oracle o;
    struct loaded loaded;
    uint64_t seed;
};

static void expect(struct seen_time *s, const char *name, long double expected)
{
    figure_id id = loaded_find(&s->loaded, name);
    loaded_evaluate(&s->loaded);
    double got = figure_value(s->loaded.figures, id);
    ck_assert_msg(fabsl(got - expected) <= 1e-11L * fabsl(expected) + 1e-300L,
                  "world %llu, %s: %.17g, averaged %.17Lg\n%s", (unsigned long long)s->seed, name,
                  got, expected, timed_world_text(s->w));
    met.figures++;
}

static struct wanted *wanted_new(const struct seen_time *s, size_t n)
{
    struct wanted *x = NEW(s->w->arena, struct wanted);
    x->o = &s->o;
    x->n = n;
    return x;
}

static long double mean_of(const struct wanted *x, size_t k)
{
    long double sum = 0;
    if (!x->yearly)
        return x->mean[0][k];
    for (int y = 0; y < x->o->w->years; y++)
        sum += x->mean[y][k] / x->o->w->years;
    return sum;
}

/* All failures of an element, whatever their cause: one event. */
static void expect_element(struct seen_time *s, size_t i)
{
    struct oracle whole = s->o;
    struct wanted *x = wanted_new(s, 1);
    struct tw_rates r = rates_of(s->w, i);
    whole.n = 1;
    whole.event[0] = element_of(&s->o, i, r.per_demand, r.undetected, r.detected);
    x->o = &whole;
    x->reach = 1u << i;
    for (unsigned set = 0; set < SETS; set++)
        x->value[set][0] = set >> i & 1;
    fill_means(x);
    expect(s, arena_printf(s->w->arena, "E%zu.fails", i), mean_of(x, 0));
}

static void expect_scheme(struct seen_time *s, size_t i)
{
    struct wanted *x = wanted_new(s, 1);
    x->reach = reach_of(s->w, TW_ELEMENTS + i);
    for (unsigned set = 0; set < 1u << s->w->n_elements; set++)
        x->value[set][0] = !works(s->w, TW_ELEMENTS + i, set, false);
    fill_means(x);
    expect(s, arena_printf(s->w->arena, "S%zu.fails", i), mean_of(x, 0));
}

/* The mean over the horizon of an end: years in which the hazard comes more often weigh more. */
static long double weighted(const struct wanted *x, size_t end)
{
    long double sum = 0;
    if (!x->yearly)
        return x->mean[0][end];
    for (int y = 0; y < x->o->w->years; y++)
        sum += x->o->frequency[y] * x->mean[y][end] / x->o->w->years;
    return sum / x->o->mean_frequency;
}

static long double damage_in(const struct wanted *x, const struct tree_ends *e, int year)
{
    long double sum = 0;
    for (size_t k = 0; k < e->n; k++)
        if (e->outcome[k] < TW_OUTCOMES)
            sum += x->mean[x->yearly ? year : 0][k] * x->o->w->euros[e->outcome[k]];
    return sum;
}

/* A figure stands for the first of the years that are alike. */
static bool has_figure(struct seen_time *s, const char *name)
{
    figure_id id;
    return figures_find(s->loaded.figures, name, &id, NULL) == OHMEN_OK;
}

static void expect_years(struct seen_time *s, const struct wanted *x, const struct tree_ends *e)
{
    struct arena *a = s->w->arena;
    bool trended = s->w->growth != 0 || s->w->rate_growth != 0;
    for (int y = 0; y < s->w->years; y++) {
        const char *risk = arena_printf(a, "H.risk.%d", s->w->start + y);
        bool there = has_figure(s, risk);
        ck_assert(there || !trended);
        ck_assert(there || y > 0 || !x->yearly);
        if (there)
            expect(s, risk, s->o.frequency[y] * damage_in(x, e, y));
        for (size_t k = 0; x->yearly && k < e->n; k++) {
            const char *end = arena_printf(a, "H.end.%s.%d", e->path[k], s->w->start + y);
            if (has_figure(s, end))
                expect(s, end, x->mean[y][k]);
        }
    }
}

/* What all years together must give, whether or not they have figures of their own. */
static void expect_hazard(struct seen_time *s)
{
    struct tree_ends e = ends_of(s->w);
    struct wanted *x = wanted_new(s, e.n);
    long double risk = 0, outcome[TW_OUTCOMES + 1] = {0};
    x->disables = true;
    tree_values(s->w, x);
    fill_means(x);
    for (size_t k = 0; k < e.n; k++) {
        expect(s, arena_printf(s->w->arena, "H.end.%s", e.path[k]), weighted(x, k));
        outcome[e.outcome[k]] += weighted(x, k);
    }
    for (size_t i = 0; i < TW_OUTCOMES; i++)
        expect(s, arena_printf(s->w->arena, "H.probability.o%zu", i), outcome[i]);
    for (int y = 0; y < s->w->years; y++)
        risk += s->o.frequency[y] * damage_in(x, &e, y) / s->w->years;
    expect(s, "H.frequency", s->o.mean_frequency);
    expect(s, "H.risk", risk);
    expect_years(s, x, &e);
}

static void check_world(uint64_t seed)
{
    struct arena *a = arena_new(NULL);
    struct seen_time *s = NEW(a, struct seen_time);
    s->w = timed_world_random(a, seed);
    s->o.w = s->w;
    s->seed = seed;
    fill_frequencies(&s->o);
    fill_events(&s->o);
    loaded_text(&s->loaded, a, timed_world_text(s->w), NULL);
    for (size_t i = 0; i < s->w->n_elements; i++)
        expect_element(s, i);
    for (size_t i = 0; i < s->w->n_schemes; i++)
        expect_scheme(s, i);
    expect_hazard(s);
    met.shocks += s->o.n - s->w->n_elements;
    arena_free(a);
}

START_TEST(protection_in_time)
{
    for (uint64_t seed = 1; seed <= 250; seed++)
        check_world(seed);
    ck_assert_uint_gt(met.figures, 2000);
    ck_assert_uint_gt(met.yearly, 200);
    ck_assert_uint_gt(met.cycles, 200);
    ck_assert_uint_gt(met.shocks, 400);
}
END_TEST

TCase *figure_time_case(void)
{
    TCase *t = tcase_create("time");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, protection_in_time);
    return t;
}
