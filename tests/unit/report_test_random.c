/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random blocks full of nasty texts and numbers. */
#include "report_test_random.h"

#include <math.h>

static const char *const nasty[] = {
    "",
    " ",
    "   ",
    "plain",
    "H-BUS1",
    "two words",
    "\033[31mred\033[0m",
    "tab\tand\nnewline\r",
    "\xe2\x80\xae right to left \xe2\x80\xac",
    "母線保護装置の不動作",
    "e\xcc\x81\xcc\x81 combined",
    "\xcc\x81",
    "zero\xe2\x80\x8bwidth",
    "\xf0\x9f\x98\x80 face",
    "bad \xff\xc3 bytes",
    "é",
    "-1",
    "=1+1",
    "a_very_long_word_without_any_blank_that_is_wider_than_most_columns_of_a_table",
    "many short words that must be wrapped on to several lines since they cannot all stand on one",
    "\x7f\xc2\x85",
    "wide 母 between",
    "1e5",
    "\xe2\x80\xa8separator",
    "soft\xc2\xadhyphen",
    "母",
    "\xcc\x88母線",
    "!",
    "<script>alert(1)</script>",
    "\"><img src=x onerror=alert(1)>",
    "&amp; &lt; & <b> 'q' ]]> <!-- -->",
    "http://example.org/x?a=1&b=2",
    "\xd7\xa9\xd7\x9c\xd7\x95\xd7\x9d 12 \xd9\x85\xd8\xb1\xd8\xad\xd8\xa8\xd8\xa7",
    "100 % \\u{1234} \"quoted\" 'x'"};

static const double extremes[] = {
    0, -0.0, 1, 1e-12, 5e-324, 1.7976931348623157e308, -3.5e-7, 123456789, 0.9999999, 99950, -1e15};

const char *some_text(struct random *r)
{
    return random_pick(r, nasty);
}

static double some_number(struct random *r)
{
    return random_index(r, 3) ? random_log_uniform(r, 1e-9, 1e9) : random_pick(r, extremes);
}

static void add_some_cell(struct random *r, struct report *report, struct row *row, bool number)
{
    struct cell *c;
    switch (random_index(r, 10)) {
    case 0: c = row_empty(report, row); break;
    case 1: c = row_count(report, row, random_next(r)); break;
    case 2: c = row_yes(report, row, random_index(r, 2)); break;
    case 3: c = row_date(report, row, "2027-03-31"); break;
    case 4: c = row_text(report, row, some_text(r)); break;
    default:
        c = number ? row_number(report, row, some_number(r), "figure")
                   : row_text(report, row, some_text(r));
    }
    if (random_index(r, 6) == 0)
        c->mark = random_index(r, 3) ? "!" : some_text(r);
}

void add_some_table(struct random *r, struct report *report)
{
    struct block *b = report_table(report, "table", some_text(r));
    bool number[12];
    size_t columns = random_index(r, 12) + 1, rows = random_index(r, 6);
    for (size_t j = 0; j < columns; j++) {
        number[j] = random_index(r, 2);
        struct column *c = block_column(report, b, arena_printf(report->arena, "k%zu", j),
                                        some_text(r), random_index(r, 3) ? "EUR/a" : some_text(r),
                                        (enum number_style)random_index(r, 6));
        c->right = random_index(r, 2);
        c->keep = (unsigned)random_index(r, 4);
    }
    for (size_t i = 0; i < rows; i++) {
        struct row *row = block_row(report, b);
        for (size_t j = 0; j < columns - random_index(r, 2); j++)
            add_some_cell(r, report, row, number[j]);
    }
}

void add_some_pairs(struct random *r, struct report *report)
{
    struct block *b = report_pairs(report, "pairs", some_text(r));
    for (size_t i = random_index(r, 5); i-- > 0;) {
        struct row *row = block_pair(report, b, some_text(r));
        if (random_index(r, 2))
            add_some_cell(r, report, row, false);
        else
            pair_number(report, row, some_number(r), some_text(r),
                        (enum number_style)random_index(r, 6), NULL)
                ->mark = some_text(r);
    }
}

void add_some_grid(struct random *r, struct report *report)
{
    struct block *b =
        report_grid(report, "grid", some_text(r), random_index(r, 2) ? "EUR" : some_text(r));
    size_t n = random_index(r, 12);
    for (size_t i = 0; i < n; i++) {
        struct grid_mark *m = grid_add_mark(report, b, some_text(r), some_text(r),
                                            fabs(some_number(r)), fabs(some_number(r)));
        if (i && random_index(r, 4) == 0)
            m->part_of = (int)random_index(r, i);
        else
            m->arrow_from = (int)random_index(r, n + 1) - 1;
    }
    for (size_t i = random_index(r, 3); i-- > 0;)
        grid_add_line(report, b, some_text(r), random_log_uniform(r, 1e-3, 1e6), some_text(r));
}

static double drawable(double x)
{
    return fabs(x) <= 1e300 ? x : 2.385;
}

void add_some_curve(struct random *r, struct report *report)
{
    struct block *b = report_curve(report, "curve", some_text(r));
    curve_set_x(report, b, "x", some_text(r), some_text(r), (enum number_style)random_index(r, 7))
        ->log = random_index(r, 2);
    struct curve_axis *y = curve_set_y(report, b, "y", some_text(r), some_text(r),
                                       (enum number_style)random_index(r, 7));
    y->log = random_index(r, 2);
    y->from_data = random_index(r, 2);
    for (size_t i = random_index(r, 4); i-- > 0;) {
        struct curve_line *l = curve_add_line(report, b, some_text(r), some_text(r));
        double x = drawable(some_number(r));
        l->steps = random_index(r, 3) == 0;
        for (size_t k = random_index(r, 20); k-- > 0; x = fmax(x, drawable(some_number(r))))
            curve_add_point(report, l, x, drawable(some_number(r)));
    }
    for (size_t i = random_index(r, 4); i-- > 0;)
        curve_add_mark(report, b, some_text(r), drawable(some_number(r)), drawable(some_number(r)));
}

static enum number_style some_style(struct random *r)
{
    return (enum number_style)random_index(r, 8);
}

void add_some_swings(struct random *r, struct report *report)
{
    struct block *b =
        report_swings(report, "swings", some_text(r), drawable(some_number(r)), some_text(r));
    swings_set_axis(report, b, "result", some_text(r), some_text(r), some_style(r));
    swings_set_turns(report, b, some_text(r));
    for (size_t i = random_index(r, 6); i-- > 0;) {
        double low = drawable(some_number(r)), high = drawable(some_number(r));
        struct swing *s = swings_add(report, b, some_text(r), some_text(r), low, high);
        s->low_turns = random_index(r, 2);
        s->high_turns = random_index(r, 2);
        s->low_figure = some_text(r);
    }
}

/* A number with room above it. */
static double some_start(struct random *r)
{
    double x = some_number(r);
    return fabs(x) <= 1e250 ? x : 2.385;
}

void add_some_map(struct random *r, struct report *report)
{
    struct block *b = report_map(report, "map", some_text(r));
    map_set_x(report, b, "x", some_text(r), some_text(r), some_style(r))->log = random_index(r, 2);
    map_set_y(report, b, "y", some_text(r), some_text(r), some_style(r))->log = random_index(r, 2);
    map_set_worth(report, b, "worth", some_text(r), some_text(r), some_style(r));
    size_t across = random_index(r, 9), up = random_index(r, 30), n = random_index(r, 70) + 1;
    double x = some_start(r), y = some_start(r);
    for (size_t i = 0; i < across; i++, x += fabs(x) * random_uniform(r, 0.1, 2) + 1e-3)
        map_add_x(report, b, x);
    for (size_t i = 0; i < up; i++, y += fabs(y) * random_uniform(r, 0.1, 2) + 1e-3)
        map_add_y(report, b, y);
    for (size_t i = 0; i < n; i++)
        map_add_choice(report, b, some_text(r), random_index(r, 4) == 0)->figure = some_text(r);
    size_t cells = across * up, missing = cells > 0 && random_index(r, 9) == 0;
    for (size_t i = cells - missing; i-- > 0;)
        map_add_cell(report, b, random_index(r, n), drawable(some_number(r)));
    if (random_index(r, 2))
        map_set_today(b, drawable(some_number(r)), drawable(some_number(r)));
}

void add_some_spreads(struct random *r, struct report *report)
{
    struct block *b = report_spreads(report, "spreads", some_text(r));
    bool alike = random_index(r, 2);
    const char *unit = some_text(r);
    enum number_style style = some_style(r);
    for (size_t i = random_index(r, 6); i-- > 0;) {
        struct spread *s = spreads_add(report, b, some_text(r), alike ? unit : some_text(r),
                                       alike ? style : some_style(r));
        for (int k = 0; k < SPREAD_PARTS; k++)
            spread_set(report, s, (enum spread_part)k, drawable(some_number(r)),
                       random_index(r, 2) ? -1 : fabs(drawable(some_number(r))), some_text(r));
    }
}

static void set_node(struct random *r, struct tree_node *n)
{
    n->steps = random_index(r, 2) ? some_text(r) : NULL;
    n->has_probability = random_index(r, 2);
    n->probability = random_uniform(r, 0, 1);
    n->probability_figure = some_text(r);
    n->value = drawable(some_number(r));
    n->reach = random_index(r, 3) ? random_uniform(r, 0, 1) : 0;
    n->best = random_index(r, 2);
    n->folded = random_index(r, 5) == 0;
    n->ends = random_index(r, 30);
    n->same_as = random_index(r, 8) ? NULL : some_text(r);
}

/* Each node below any of those before it, which are few: so trees are deep or wide. */
void add_some_tree(struct random *r, struct report *report)
{
    struct tree_node *nodes[60];
    struct block *b =
        report_tree(report, "tree", some_text(r), some_text(r), some_style(r), some_text(r));
    size_t n = random_index(r, 60), near = random_index(r, 60) + 1;
    for (size_t i = 0; i < n; i++) {
        size_t back = random_index(r, i < near ? i + 1 : near);
        struct tree_node *parent = i ? nodes[back < i ? i - 1 - back : 0] : NULL;
        nodes[i] = tree_add(report, b, parent, (enum tree_kind)random_index(r, 3), some_text(r));
        set_node(r, nodes[i]);
    }
}

void add_some_policy(struct random *r, struct report *report)
{
    struct block *b = report_policy(report, "policy", some_text(r));
    size_t actions = random_index(r, 70), times = random_index(r, 40), rows = random_index(r, 8);
    for (size_t i = 0; i < actions; i++)
        policy_add_action(report, b, some_text(r), random_index(r, 4) == 0);
    for (size_t t = 0; t < times; t++)
        policy_add_time(report, b,
                        random_index(r, 3) ? arena_printf(report->arena, "%zu", 2027 + t)
                                           : some_text(r));
    for (size_t i = 0; i < rows; i++)
        policy_add_condition(report, b, some_text(r));
    for (size_t i = 0; i < rows * times; i++) {
        bool none = actions == 0 || random_index(r, 5) == 0;
        if (random_index(r, 6))
            policy_set(report, b, i / times, i % times,
                       none ? POLICY_NONE : random_index(r, random_index(r, actions) + 1),
                       random_index(r, 3) ? random_uniform(r, 0, 1) : 0, some_text(r));
    }
}

void fill_at_random(struct random *r, struct report *report)
{
    for (size_t i = random_index(r, 6) + 1; i-- > 0;) {
        switch (random_index(r, 11)) {
        case 0: report_heading(report, (int)random_index(r, 3) + 1, some_text(r)); break;
        case 1:
            report_note(report, "note", "%s %s\n  %s\n\n%s", some_text(r), some_text(r),
                        some_text(r), some_text(r));
            break;
        case 2: add_some_pairs(r, report); break;
        case 3: add_some_table(r, report); break;
        case 4: add_some_grid(r, report); break;
        case 5: add_some_curve(r, report); break;
        case 6: add_some_swings(r, report); break;
        case 7: add_some_map(r, report); break;
        case 8: add_some_spreads(r, report); break;
        case 9: add_some_tree(r, report); break;
        case 10: add_some_policy(r, report); break;
        }
    }
}
