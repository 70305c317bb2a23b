/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Unwanted operation of random schemes against enumeration of all states of their elements.
 *
 * The oracle knows no functions of structures beyond "does it deliver": it asks of one set of
 * states whether the scheme trips. */
#include <math.h>

#include "random.h"
#include "unwanted_test.h"

enum { MOST = 7, ROUNDS = 150 };
enum standing { SOUND, FAILED, ASSERTED };

struct part {
    int element; /* or -1 */
    int k, n;    /* k of n parts */
    struct part *of[4];
};

struct world {
    struct random random;
    struct arena *arena;
    int n;
    bool decides[MOST], breaker[MOST];
    double q[MOST], a[MOST], rate[MOST];
    struct part *root;
    enum standing state[MOST];
};

/* --- drawing --- */

static struct part *draw_part(struct world *w, int depth)
{
    struct part *p = NEW(w->arena, struct part);
    p->element = -1;
    if (depth == 0 || random_index(&w->random, 3) == 0) {
        p->element = (int)random_index(&w->random, (size_t)w->n);
        return p;
    }
    p->n = 2 + (int)random_index(&w->random, 3);
    int form = (int)random_index(&w->random, 3);
    p->k = form == 0 ? p->n : form == 1 ? 1 : 1 + (int)random_index(&w->random, (size_t)p->n);
    for (int i = 0; i < p->n; i++)
        p->of[i] = draw_part(w, depth - 1);
    return p;
}

static void draw(struct world *w)
{
    w->n = 1 + (int)random_index(&w->random, MOST);
    for (int i = 0; i < w->n; i++) {
        w->decides[i] = random_index(&w->random, 2) == 0;
        w->breaker[i] = !w->decides[i] && random_index(&w->random, 3) == 0;
        w->q[i] = random_log_uniform(&w->random, 1e-4, 0.3);
        w->a[i] = random_index(&w->random, 3) ? random_log_uniform(&w->random, 1e-4, 0.5) : 0;
        w->rate[i] = random_index(&w->random, 3) ? random_log_uniform(&w->random, 1e-3, 2) : 0;
    }
    w->root = draw_part(w, 3);
}

static void write_part(struct text *t, const struct part *p)
{
    if (p->element >= 0) {
        text_printf(t, "E%d", p->element);
        return;
    }
    if (p->k == p->n)
        text_add(t, "{all: [");
    else if (p->k == 1)
        text_add(t, "{any: [");
    else
        text_printf(t, "{at-least: %d, of: [", p->k);
    for (int i = 0; i < p->n; i++) {
        text_add(t, i ? ", " : "");
        write_part(t, p->of[i]);
    }
    text_add(t, "]}");
}

static const char *document(const struct world *w)
{
    struct text t;
    text_init(&t, w->arena);
    text_add(&t, "elements:\n");
    for (int i = 0; i < w->n; i++) {
        text_printf(&t, "  E%d: {kind: %s, per-demand: %.17g", i,
                    w->decides[i]   ? "setting"
                    : w->breaker[i] ? "breaker"
                                    : "trip-circuit",
                    w->q[i]);
        text_printf(&t, ", unwanted: {by-itself: %.17g per a", w->rate[i]);
        if (w->a[i] > 0)
            text_printf(&t, ", per-event: {surge: %.17g}", w->a[i]);
        text_add(&t, "}}\n");
    }
    text_add(&t, "  X: {kind: relay, per-demand: 0.5, unwanted: {per-event: {surge: 0.5}}}\n"
                 "schemes: {S: {works: {all: [");
    write_part(&t, w->root);
    text_add(&t, "]}}}\n");
    return text_str(&t);
}

/* --- the oracle --- */

static bool holds_decider(const struct world *w, const struct part *p)
{
    bool any = p->element >= 0 && w->decides[p->element];
    for (int i = 0; i < p->n; i++)
        any = any || holds_decider(w, p->of[i]);
    return any;
}

/* A branch that holds no decider gives no trip beside branches that hold one. */
static bool waits(const struct world *w, const struct part *p, const struct part *in)
{
    return in->k < in->n && holds_decider(w, in) && !holds_decider(w, p);
}

/* Does it give a trip, with every decider as it is, or as though it had asserted itself? */
static bool delivers(const struct world *w, const struct part *p, bool all_decided)
{
    if (p->element >= 0) {
        int i = p->element;
        return w->decides[i] ? all_decided || w->state[i] == ASSERTED : w->state[i] != FAILED;
    }
    int met = 0;
    for (int i = 0; i < p->n; i++)
        met += (all_decided || !waits(w, p->of[i], p)) && delivers(w, p->of[i], all_decided);
    return met >= p->k;
}

/* Does a carrier that has asserted itself make it give a trip? In series whatever decides behind
 * it follows; side by side it is counted with those that give one already. */
static bool is_misled(const struct world *w, const struct part *p)
{
    if (p->element >= 0)
        return !w->decides[p->element] && w->state[p->element] == ASSERTED;
    int met = 0, misled = 0;
    for (int i = 0; i < p->n; i++) {
        bool here = is_misled(w, p->of[i]);
        if (p->k == p->n && here) {
            int others = 0;
            for (int j = 0; j < p->n; j++)
                others += j == i || delivers(w, p->of[j], true);
            misled += others == p->n;
        }
        misled += p->k < p->n && here;
        met += here || (!waits(w, p->of[i], p) && delivers(w, p->of[i], false));
    }
    return misled > 0 && (p->k == p->n || met >= p->k);
}

static bool is_in(const struct part *p, int element)
{
    bool any = p->element == element;
    for (int i = 0; i < p->n; i++)
        any = any || is_in(p->of[i], element);
    return any;
}

static bool scheme_trips(const struct world *w)
{
    for (int i = 0; i < w->n; i++)
        if (w->breaker[i] && w->state[i] == ASSERTED && is_in(w->root, i))
            return true;
    return (holds_decider(w, w->root) && delivers(w, w->root, false)) || is_misled(w, w->root);
}

/* Sum over the states of elements i, i + 1, ...; `alone` >= 0: that one is asserted and no
 * other. */
static double enumerate(struct world *w, int i, int alone)
{
    if (i == w->n)
        return scheme_trips(w);
    double a = alone < 0 ? w->a[i] : i == alone, q = i == alone ? 0 : w->q[i], sum = 0;
    const double p[] = {[SOUND] = 1 - a - q, [FAILED] = q, [ASSERTED] = a};
    for (enum standing s = SOUND; s <= ASSERTED; s++) {
        w->state[i] = s;
        if (p[s] > 0)
            sum += p[s] * enumerate(w, i + 1, alone);
    }
    return sum;
}

START_TEST(random_schemes_are_enumerated)
{
    struct world w = {.random = random_seed(4711 + (uint64_t)_i), .arena = arena_new(NULL)};
    struct loaded l;
    double total = 0;
    draw(&w);
    unwanted_load(&l, w.arena, document(&w));
    for (int i = 0; i < w.n; i++)
        if (is_in(w.root, i)) {
            const char *name = arena_printf(w.arena, "S.unwanted.by-itself.E%d", i);
            double part = w.rate[i] * enumerate(&w, 0, i);
            unwanted_expect(&l, name, part, 1e-11);
            unwanted_explains(&l, name);
            total += part;
        }
    unwanted_expect(&l, "S.unwanted", total, 1e-11);
    bool known = false;
    for (int i = 0; i < w.n; i++)
        known = known || (w.a[i] > 0 && is_in(w.root, i));
    if (known) {
        unwanted_expect(&l, "S.unwanted-per-event.surge", enumerate(&w, 0, -1), 1e-11);
        unwanted_explains(&l, "S.unwanted-per-event.surge");
    }
    arena_free(w.arena);
}
END_TEST

TCase *unwanted_random_case(void)
{
    TCase *t = tcase_create("random");
    tcase_add_loop_test(t, random_schemes_are_enumerated, 0, ROUNDS);
    return t;
}
