/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A choice that comes again each year: 25 years, 15 states, three branches and four options, on a
 * hazard whose protection is tested in time; from the loaded model to all figures of the decision.
 * Owns nothing. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "decide/weigh.h"
#include "doc/yaml.h"
#include "median.h"
#include "model/documents.h"

enum { YEARS = 25, STATES = 15 };

static const char head[] =
    "register: {title: Bench, currency: EUR, prices: 2026, start: 2026-01-01, horizon: 25 a, "
    "discount: 4 % per a}\n"
    "elements:\n"
    "  RELAY: {kind: relay, undetected: 0.01 per a, since: 2020-01-01, test: {every: 4 a}}\n"
    "  SPARE: {kind: relay, undetected: 0.02 per a, since: 2022-01-01, test: {every: 3 a}}\n"
    "  BREAKER: {kind: breaker, per-demand: 0.002}\n"
    "  BATTERY: {kind: dc-supply, per-demand: 0.0003}\n"
    "schemes:\n"
    "  MAIN: {all: [RELAY, BATTERY, BREAKER]}\n"
    "  BACKUP: {all: [SPARE, BATTERY]}\n"
    "hazards:\n"
    "  H:\n"
    "    name: Fault\n"
    "    frequency: 0.05 per a\n"
    "    response:\n"
    "      fast: {cleared-by: MAIN, in: 90 ms, outcome: spared}\n"
    "      slow: {cleared-by: BACKUP, in: 500 ms, outcome: damaged}\n"
    "      never: {outcome: lost}\n"
    "    outcomes:\n"
    "      spared: {name: Spared, damage: {x: {category: c, is: 10 kEUR}}}\n"
    "      damaged: {name: Damaged, damage: {x: {category: c, is: 200 kEUR}}}\n"
    "      lost: {name: Lost, damage: {x: {category: c, is: 4 MEUR}}}\n"
    "options:\n"
    "  RENEW: {name: Renew, invest: {is: 300 kEUR}, change: {}}\n"
    "  REPAIR: {name: Repair, invest: {is: 40 kEUR}, change: {}}\n"
    "  GUARD: {name: Guard, invest: {is: 30 kEUR}, running: 1 kEUR per a,\n"
    "    change: {hazards: {H: {frequency: 0.7 * was}}}}\n"
    "  FIRE: {name: Fire protection, invest: {is: 20 kEUR}, change: {elements: {SPARE: {test: "
    "{every: 1 a}}}}}\n"
    "decisions:\n"
    "  D:\n"
    "    question: What each year\n"
    "    every: 1 a\n"
    "    sees: [AGE]\n"
    "    choose: {wait: [], renew: [{apply: RENEW}], repair: [{apply: REPAIR}]}\n"
    "  D-FOUR:\n"
    "    question: What each year, with two that last\n"
    "    every: 1 a\n"
    "    sees: [AGE]\n"
    "    choose: {wait: [], renew: [{apply: RENEW}], guard: [{apply: GUARD}], fire: [{apply: "
    "FIRE}]}\n";

static const char *write_register(struct arena *a)
{
    struct text t;
    text_init(&t, a);
    text_printf(&t, "%sstates:\n  AGE:\n    name: Condition\n    is: {s00: rest", head);
    for (int i = 1; i < STATES; i++)
        text_printf(&t, ", s%02d: 1 %%", i);
    text_add(&t, "}\n    when:\n");
    for (int i = 1; i < STATES; i++)
        text_printf(&t, "      s%02d: {hazards: {H: {frequency: %g * was}}}\n", i, 1 + 0.5 * i);
    text_add(&t, "    becomes:\n");
    for (int i = 0; i + 1 < STATES; i++)
        text_printf(&t, "      s%02d: {s%02d: %g per a}\n", i, i + 1, 0.2 + 0.02 * i);
    text_add(&t, "    failures: {H: {lost: s00}}\n    renewed-by: {RENEW: s00, REPAIR: s05}\n");
    return text_str(&t);
}

/* Ends the program where the register is not as it should be. */
static struct figures *figures_of(struct arena *a, const char *text)
{
    struct diags d;
    struct model_sources none = {0}, all = {0};
    struct figures *f = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    diags_init(&d, a);
    const struct node *root = yaml_read(a, "bench.yaml", text, strlen(text), &d);
    bool merged = root && documents_merge(a, &none, 1, &root, &all, &d);
    struct model *m = merged ? model_load(a, all.at, all.n, &d) : NULL;
    if (!m || d.count || figures_new(a, m, NULL, date_of(2026, 1, 1), &f, &e) != OHMEN_OK)
        exit(1);
    return f;
}

static void tell(const char *text, const char *decision)
{
    double times[RUNS];
    for (int run = 0; run < RUNS; run++) {
        struct arena *a = arena_new(NULL);
        struct weighing *w;
        ohmen_error e = OHMEN_ERROR_INIT;
        struct figures *f = figures_of(a, text);
        double from = bench_worked();
        if (weigh_ranked(f, decision, &w, &e) != OHMEN_OK) {
            fprintf(stderr, "%s\n", e.text);
            exit(1);
        }
        times[run] = bench_worked() - from;
        arena_free(a);
    }
    printf("a choice each year, %d years, %d states: %-7s %8.2f ms\n", YEARS, STATES, decision,
           bench_median(times));
}

int main(void)
{
    struct arena *a = arena_new(NULL);
    const char *text = write_register(a);
    tell(text, "D");
    tell(text, "D-FOUR");
    arena_free(a);
    return 0;
}
