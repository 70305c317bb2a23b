/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One invented report as text at four widths, as JSON, CSV and HTML, compared with the files
 * in tests/golden/report. With OHMEN_ACCEPT=1 in the environment the files are
 * written anew instead: read the difference before you keep it. */
#include "report_test.h"

#include <stdlib.h>
#include <string.h>

#include "base/file.h"

static const struct hazard {
    const char *id, *name;
    double f, d;
    unsigned n;
    const char *mark;
} hazards[] = {
    {"H-BUS1", "Fault on busbar 1 that is cleared late", 2.94e-3, 4.2e6, 12, "!"},
    {"H-FEED-NORTH", "Feeder breaker fails to open", 0.0213, 185000, 3, NULL},
    {"H-TR2", "Inner fault of transformer 2, 母線保護 not tested", 1.2e-12, 23.4e6, 0, NULL},
    {"H-ROUTINE", "Unwanted operation on an outer fault", 3.12, 900, 140, NULL},
    {"H-NONE", "Nothing", 0, 0, 0, NULL},
};

static void add_summary(struct report *r)
{
    report_heading(r, 1, "Harbour: register of risks");
    struct block *b = report_pairs(r, "title", NULL);
    row_text(r, block_pair(r, b, "Register"), "harbour.ohmen");
    row_date(r, block_pair(r, b, "Date of data"), "2027-03-31");
    pair_number(r, block_pair(r, b, "Risk of all hazards"), 123456, "EUR/a", STYLE_MONEY, "risk")
        ->mark = "!";
    pair_number(r, block_pair(r, b, "Frequency of a busbar fault"), 2.94e-3, "1/a", STYLE_FREQUENCY,
                "H-BUS1.frequency");
    pair_number(r, block_pair(r, b, "Failure on demand"), 0.0123, "", STYLE_PERCENT, "p");
    static const char *const roles[] = {"Prepared", "Checked", "Approved by the head of grids"};
    report_signatures(r, "signatures", "Signatures", roles, 3);
    report_note(r, "intro",
                "The figures rest on faults and tests up to the date of data. A rate "
                "that was learnt from two faults in nine years is not a number but a "
                "distribution.\n\n  ! : above the criterion, café included\n");
}

static void add_hazards(struct report *r)
{
    report_heading(r, 2, "Hazards");
    struct block *b = report_table(r, "hazards", "Hazards by risk");
    block_column(r, b, "id", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN);
    block_column(r, b, "frequency", "Frequency", "1/a", STYLE_FREQUENCY)->keep = 3;
    block_column(r, b, "damage", "Expected damage", "EUR", STYLE_MONEY)->keep = 2;
    block_column(r, b, "risk", "Risk", "EUR/a", STYLE_MONEY);
    block_column(r, b, "share", "Share of all risk", "", STYLE_PERCENT)->keep = 1;
    block_column(r, b, "tests", "Tests", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < sizeof hazards / sizeof *hazards; i++) {
        const struct hazard *h = &hazards[i];
        struct row *row = block_row(r, b);
        row_text(r, row, h->id);
        row_text(r, row, h->name);
        row_number(r, row, h->f, arena_printf(r->arena, "%s.frequency", h->id));
        if (i == 3)
            row_empty(r, row);
        else
            row_number(r, row, h->d, NULL);
        row_number(r, row, h->f * h->d, arena_printf(r->arena, "%s.risk", h->id))->mark = h->mark;
        row_number(r, row, h->f * h->d / 20000, NULL);
        row_count(r, row, h->n);
    }
}

static void add_picture(struct report *r)
{
    report_heading(r, 3, "Options for busbar 1");
    struct block *b = report_grid(r, "grid", "Risk today and with each option", "EUR");
    grid_add_mark(r, b, "BUS1", "Fault on busbar 1", 2.94e-3, 4.2e6);
    grid_add_mark(r, b, "a", "fit 87B to busbar 1", 2.5e-3, 2.1e5)->arrow_from = 0;
    grid_add_mark(r, b, "b", "test twice a year", 2e-4, 4.2e6)->arrow_from = 0;
    grid_add_mark(r, b, "FEED", "Feeder breaker fails to open", 0.0213, 185000);
    grid_add_mark(r, b, "TR2", "Inner fault of transformer 2", 2e-5, 2.3e7);
    grid_add_mark(r, b, "c", "as b, but cheap", 2.01e-4, 4.1e6)->arrow_from = 0;
    grid_add_mark(r, b, "d", "a and b together", 1e-4, 3e4)->arrow_from = 0;
    grid_add_mark(r, b, "ROUT", "Unwanted operation", 3.12, 900);
    grid_add_mark(r, b, "NONE", "Nothing ever", 0, 900);
    grid_add_mark(r, b, "FEED1", "Feeder burnt", 2.13e-3, 1.2e6)->part_of = 3;
    grid_add_mark(r, b, "FEED2", "Feeder tripped", 0.0192, 72000)->part_of = 3;
    grid_add_mark(r, b, "TR2b", "Transformer lost", 1.98e-5, 2.31e7)->part_of = 4;
    b->grid->parts = "an outcome of it";
    grid_add_line(r, b, "intolerable above 30 kEUR/a", 3e4, "#");
    grid_add_line(r, b, "acceptable", 300, "=");
}

/* Failure grows by 0.0036 a year and is 0 again after each test, every four years. */
static void add_sawtooth(struct report *r)
{
    struct block *b = report_curve(r, "failure", "Failure on demand over 25 years");
    curve_set_x(r, b, "year", "Year", "", STYLE_YEAR);
    curve_set_y(r, b, "probability", "Probability of failure on demand", "", STYLE_PROBABILITY);
    struct curve_line *l = curve_add_line(r, b, "Main protection of busbar 1", "o");
    l->figure = "H-BUS1.failure";
    for (int k = 0; k < 7; k++) {
        double end = k == 6 ? 2052.25 : 2031.25 + 4 * k;
        curve_add_point(r, l, k ? 2027.25 + 4 * k : 2027.25, k ? 0 : 0.0047);
        curve_add_point(r, l, end, (end - 2027.25 - 4 * k) * 0.0036 + (k ? 0 : 0.0047));
    }
    curve_add_mark(r, b, "next test", 2031.25, 0.0191)->x_figure = "H-BUS1.next-test";
}

/* Faults of 2385 EUR/a for each year between tests, 12600 EUR a test; their sum. */
static void add_costs(struct report *r)
{
    struct block *b = report_curve(r, "interval", "Cost of testing and of not testing");
    curve_set_x(r, b, "interval", "Interval between tests", "a", STYLE_PLAIN)->log = true;
    curve_set_y(r, b, "cost", "Yearly cost", "EUR/a", STYLE_MONEY);
    static const char *const names[] = {"Tests", "Faults", "Both", "Both, as agreed"};
    static const char *const symbols[] = {"t", "f", "+", "+"};
    for (int i = 0; i < 3; i++) {
        struct curve_line *l = curve_add_line(r, b, names[i], symbols[i]);
        for (double x = 0.25; x <= 8; x *= 1.25992104989487319) {
            double tests = i == 1 ? 0 : 12600 / x, faults = i == 0 ? 0 : 2385 * x;
            curve_add_point(r, l, x, tests + faults);
        }
    }
    curve_add_line(r, b, names[3], symbols[3]);
    curve_add_mark(r, b, "best", 2.2985, 10963.8)->y_figure = "D-TEST.best";
    curve_add_mark(r, b, "today", 6, 16410);
}

/* One step a year, from an axis that does not begin at 0. */
static void add_risks(struct report *r)
{
    struct block *b = report_curve(r, "risk-by-year", "Risk year by year");
    curve_set_x(r, b, "time", "Years from now", "a", STYLE_PLAIN);
    curve_set_y(r, b, "risk", "Risk", "EUR/a", STYLE_MONEY)->from_data = true;
    struct curve_line *l = curve_add_line(r, b, "Harbour", "h");
    for (int k = 0; k < 20; k++) {
        curve_add_point(r, l, k, 123456 + 1740 * k - 9000 * (k / 7));
        curve_add_point(r, l, k + 1, 123456 + 1740 * k - 9000 * (k / 7));
    }
}

/* How likely a year costs more than so much, of four things that happen or not. */
static void add_exceedance(struct report *r)
{
    struct block *b = report_curve(r, "exceedance", "How bad a year can be");
    curve_set_x(r, b, "damage", "Damage in a year", "EUR", STYLE_MONEY)->log = true;
    curve_set_y(r, b, "exceedance", "Probability that it is more", "", STYLE_PROBABILITY)->log =
        true;
    static const struct {
        const char *name, *symbol;
        double damages[4], above[4];
    } lines[] = {
        {"As it is", "t", {2385, 185000, 4.2e6, 61.7e6}, {0.61, 0.0213, 2.94e-3, 7.1e-5}},
        {"Both options", "b", {2385, 72000, 9.1e5, 2.3e7}, {0.34, 0.0192, 1.2e-4, 1.7e-6}}};
    for (int i = 0; i < 2; i++) {
        struct curve_line *l = curve_add_line(r, b, lines[i].name, lines[i].symbol);
        l->steps = true;
        for (int k = 0; k < 4; k++)
            curve_add_point(r, l, lines[i].damages[k], lines[i].above[k]);
        curve_add_point(r, l, i ? 6e7 : 1.2e8, 0);
    }
}

/* What the yearly cost would be at both ends of what is not known, widest first. */
static void add_swings(struct report *r)
{
    struct block *b =
        report_swings(r, "swings", "What moves the yearly cost", 123456, "D-TEST.today");
    swings_set_axis(r, b, "cost", "Yearly cost", "EUR/a", STYLE_MONEY);
    swings_set_turns(r, b, "another option is best at this end");
    static const struct {
        const char *label, *words;
        double low, high;
        bool low_turns, high_turns;
    } rows[] = {
        {"Faults on busbar 1", "2e-3 .. 9e-3 per a", 81200, 214000, false, true},
        {"Hours until supply is back after a fault", "2 .. 12 h", 99100, 181000, false, false},
        {"Price of energy not supplied", "4 .. 11 EUR/kWh", 141000, 108000, true, false},
        {"Share of tests that find nothing", "0.1 .. 0.4", 131000, 139000, false, false},
        {"母線 spare parts", "0 .. 3", 123456, 126000, false, false},
        {"Discount rate", "2 % .. 5 %", 123460, 123450, false, false},
        {"Number of feeders", "", 123456, 123456, false, false}};
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        struct swing *s = swings_add(r, b, rows[i].label, rows[i].words, rows[i].low, rows[i].high);
        s->low_turns = rows[i].low_turns;
        s->high_turns = rows[i].high_turns;
        s->low_figure = i == 0 ? "D-TEST.low" : NULL;
    }
}

static size_t choice_at(double x, double y)
{
    return x * y < 0.003 ? 0 : x > 4 && y > 0.006 ? 3 : x >= 1.5 ? 1 : 2;
}

/* Which option is best by the rate of faults and the interval between tests. */
static void add_map(struct report *r)
{
    struct block *b = report_map(r, "map", "Best option by rate and interval");
    map_set_x(r, b, "interval", "Interval between tests", "a", STYLE_PLAIN)->log = true;
    map_set_y(r, b, "rate", "Faults", "1/a", STYLE_FREQUENCY)->log = true;
    map_set_worth(r, b, "worth", "Worth", "EUR", STYLE_MONEY);
    map_add_choice(r, b, "Leave all as it is", true);
    map_add_choice(r, b, "Test twice as often", false)->figure = "D-TEST.best";
    map_add_choice(r, b, "Fit a second protection", false);
    map_add_choice(r, b, "Both", false);
    for (int i = 0; i < 13; i++)
        map_add_x(r, b, 0.25 * (1 << i / 2) * (i % 2 ? 1.5 : 1));
    for (int k = 0; k < 9; k++)
        map_add_y(r, b, 0.001 * (1 << k / 2) * (k % 2 ? 1.5 : 1));
    for (size_t k = 0; k < b->map->ys.n; k++) {
        for (size_t i = 0; i < b->map->xs.n; i++) {
            double x = b->map->xs.at[i], y = b->map->ys.at[k];
            map_add_cell(r, b, choice_at(x, y), choice_at(x, y) ? 2.385e5 * x * y : 0);
        }
    }
    map_set_today(b, 2, 0.00294);
    b->map->today_y_figure = "H-BUS1.frequency";
}

static void add_spreads(struct report *r)
{
    struct block *b = report_spreads(r, "spreads", "How well the figures are known");
    static const struct {
        const char *label, *unit;
        enum number_style style;
        double mean, p5, p50, p95, error;
    } rows[] = {{"Risk of all hazards", "EUR/a", STYLE_MONEY, 123456, 21300, 89100, 341000, 1200},
                {"Frequency of a busbar fault", "1/a", STYLE_FREQUENCY, 2.94e-3, 1.1e-4, 1.9e-3,
                 9.2e-3, 2.2e-5},
                {"Failure on demand of the main protection of busbar 1", "", STYLE_PERCENT, 0.0123,
                 0.0047, 0.0111, 0.0236, -1}};
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        struct spread *s = spreads_add(r, b, rows[i].label, rows[i].unit, rows[i].style);
        spread_set(r, s, SPREAD_MEAN, rows[i].mean, rows[i].error, "risk");
        spread_set(r, s, SPREAD_LOW, rows[i].p5, -1, NULL);
        spread_set(r, s, SPREAD_MEDIAN, rows[i].p50, -1, NULL);
        spread_set(r, s, SPREAD_HIGH, rows[i].p95, rows[i].error * 3, NULL);
    }
    b = report_spreads(r, "worths", "Worth of the options");
    static const double worths[][4] = {
        {41000, -12000, 38000, 99000}, {15200, 14100, 15200, 16400}, {0, 0, 0, 0}};
    static const char *const names[] = {"Test twice a year", "Fit 87B", "Nothing"};
    for (size_t i = 0; i < 3; i++) {
        struct spread *s = spreads_add(r, b, names[i], "EUR/a", STYLE_MONEY);
        for (int k = 0; k < SPREAD_PARTS; k++)
            spread_set(r, s, (enum spread_part)k, worths[i][k], -1, NULL);
    }
}

/* A branch with its numbers; probability below 0: it leaves a choice. */
static struct tree_node *add_branch(struct report *r, struct block *b, struct tree_node *parent,
                                    enum tree_kind kind, const char *label, double probability,
                                    double value)
{
    struct tree_node *n = tree_add(r, b, parent, kind, label);
    n->has_probability = probability >= 0;
    n->probability = n->has_probability ? probability : 0;
    n->value = value;
    n->reach = parent ? parent->reach * (probability >= 0 ? probability : 0) : 1;
    return n;
}

static void take(struct tree_node *n, double reach)
{
    n->best = true;
    n->reach = reach;
}

/* What follows an oil test, by how it ends. */
static void add_survey(struct report *r, struct block *b, struct tree_node *survey)
{
    static const char *const ends[] = {"good", "fair, to be tested again within a year", "poor"};
    static const double chances[] = {0.714, 0.2385, 0.0475}, values[] = {81200, -12350, -104500};
    for (int i = 0; i < 3; i++) {
        enum tree_kind kind = i ? TREE_CHOOSE : TREE_END;
        struct tree_node *end = add_branch(r, b, survey, kind, ends[i], chances[i], values[i]);
        end->probability_figure = i == 2 ? "T2-WINDING.poor" : NULL;
        end->ends = i ? 2 : 0;
        if (!i)
            continue;
        struct tree_node *wait =
            add_branch(r, b, end, TREE_END, "wait", -1, values[i] - 41000.0 * i);
        struct tree_node *dry = add_branch(r, b, end, TREE_END, "dry-oil", -1, values[i]);
        dry->steps = "pay 61 kEUR; out of service for 2 week";
        take(i == 1 ? wait : dry, end->reach);
        wait->value += i == 1 ? 41000 : 0;
        dry->value -= i == 1 ? 2385 : 0;
    }
}

static void add_tree(struct report *r)
{
    struct block *b =
        report_tree(r, "tree", "What to do about the winding", "EUR", STYLE_MONEY, "Worth");
    struct tree_node *root = add_branch(
        r, b, NULL, TREE_CHOOSE, "Is the winding of transformer 2 to be looked into?", -1, 45200);
    root->value_figure = "D-WINDING.best";
    struct tree_node *survey = add_branch(r, b, root, TREE_CHANCE, "survey-first", -1, 45200);
    survey->steps = "pay 15 kEUR; wait 3 month; inspect T2-WINDING.OIL";
    take(survey, 1);
    add_survey(r, b, survey);
    struct tree_node *replace = add_branch(r, b, root, TREE_CHANCE, "replace-at-once", -1, 12300);
    replace->steps =
        "pay 1.45 MEUR; wait 14 month for delivery; 母線 is fed by transformer 1 alone";
    struct tree_node *late = add_branch(r, b, replace, TREE_CHOOSE, "late", 0.12, -84200);
    late->folded = true;
    late->ends = 12;
    struct tree_node *time = add_branch(r, b, replace, TREE_END, "in time", 0.88, 25460);
    time->same_as = "survey-first.poor.dry-oil";
    add_branch(r, b, root, TREE_END, "nothing", -1, 0);
}

/* Which action is best by what is known of the oil and by the year. */
static void add_policy(struct report *r)
{
    struct block *b = report_policy(r, "policy", "What to do with the winding, year by year");
    static const char *const conditions[] = {"good", "fair, seen 1 a ago", "poor, seen 2 a ago",
                                             "dried"};
    policy_add_action(r, b, "Leave it as it is", true);
    policy_add_action(r, b, "Test the oil", false);
    policy_add_action(r, b, "Dry the oil", false);
    policy_add_action(r, b, "Replace the winding", false);
    for (int t = 0; t < 16; t++)
        policy_add_time(r, b, arena_printf(r->arena, "%d", 2027 + t));
    for (size_t i = 0; i < 4; i++)
        policy_add_condition(r, b, conditions[i]);
    for (size_t i = 0; i < 4; i++) {
        for (size_t t = 0; t < 16; t++) {
            size_t action = i == 0 ? t == 5 : i == 1 ? 1 : i == 2 ? t < 9 ? 2 : 3 : t == 15 ? 3 : 0;
            if (i == 3 && t < 2)
                continue;
            double reach = i == 0            ? 1 - 0.0385 * (double)t
                           : i == 1 && t < 3 ? 0
                                             : 0.0123 * (double)t;
            policy_set(r, b, i, t, action, reach, t == 5 ? "D-WINDING.policy" : NULL);
        }
    }
}

static struct report sample(struct arena *a)
{
    struct report r;
    report_init(&r, a);
    add_summary(&r);
    add_hazards(&r);
    add_picture(&r);
    report_heading(&r, 3, "Through the years");
    add_sawtooth(&r);
    add_costs(&r);
    add_risks(&r);
    add_exceedance(&r);
    add_swings(&r);
    add_map(&r);
    add_spreads(&r);
    report_heading(&r, 3, "In stages");
    add_tree(&r);
    add_policy(&r);
    return r;
}

static void compare(struct arena *a, const char *name, const char *s, size_t n)
{
    const char *path = arena_printf(a, "%s/%s", report_golden_folder, name);
    const char *accept = getenv("OHMEN_ACCEPT");
    char *expected;
    size_t size;
    ohmen_error e = OHMEN_ERROR_INIT;
    if (accept && text_equal(accept, "1"))
        ck_assert_msg(file_write(path, s, n, &e) == OHMEN_OK, "%s", e.text);
    ck_assert_msg(file_read(a, path, 1 << 20, &expected, &size, &e) == OHMEN_OK, "%s", e.text);
    size_t same = 0, line = 1;
    while (same < n && same < size && s[same] == expected[same])
        line += s[same++] == '\n';
    ck_assert_msg(same == n && same == size, "%s differs in line %zu: %.60s", name, line, s + same);
}

static const struct {
    unsigned width;
    bool ascii, colour;
} formats[] = {{60, false, false},  {60, true, false},   {80, false, false},
               {80, true, false},   {120, false, false}, {120, true, false},
               {200, false, false}, {200, true, false},  {80, false, true}};

START_TEST(as_text)
{
    struct arena *a = arena_new(NULL);
    struct report r = sample(a);
    const char *s = text_of(a, &r, formats[_i].width, formats[_i].ascii, formats[_i].colour);
    const char *kind = formats[_i].colour ? "colour" : formats[_i].ascii ? "ascii" : "utf8";
    compare(a, arena_printf(a, "text-%u-%s.txt", formats[_i].width, kind), s, strlen(s));
    arena_free(a);
}
END_TEST

START_TEST(as_data)
{
    struct arena *a = arena_new(NULL);
    struct report r = sample(a);
    struct text json, csv, html;
    text_init(&json, a);
    text_init(&csv, a);
    text_init(&html, a);
    report_write_json(&json, &r);
    report_write_csv(&csv, &r);
    report_write_html(&html, &r);
    compare(a, "report.json", json.at, json.n);
    compare(a, "report.csv", csv.at, csv.n);
    compare(a, "report.html", html.at, html.n);
    arena_free(a);
}
END_TEST

Suite *suite_report_golden(void)
{
    Suite *s = suite_create("report golden");
    TCase *t = tcase_create("golden");
    tcase_add_loop_test(t, as_text, 0, (int)(sizeof formats / sizeof *formats));
    tcase_add_test(t, as_data);
    suite_add_tcase(s, t);
    return s;
}
