/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reports as neutral blocks of typed cells, and their writers.
 *
 * A use case fills a `struct report`; a writer prints it as text, JSON, CSV or HTML. No
 * writer computes: it only rounds for display. Each number carries its value in
 * the unit that it is shown in, and the name of the figure that it is, so that
 * every printed digit can be explained. Text is data: writers make it harmless.
 * The builders copy the texts that they are given into the report's arena; whoever
 * sets a field of a struct directly answers for its life himself. */
#ifndef REPORT_BLOCK_H
#define REPORT_BLOCK_H

#include <stdbool.h>

#include "base/error.h"
#include "base/text.h"

enum block_type {
    BLOCK_HEADING,
    BLOCK_NOTE,
    BLOCK_PAIRS,
    BLOCK_TABLE,
    BLOCK_GRID,
    BLOCK_CURVE,
    BLOCK_SIGNATURES,
    BLOCK_SWINGS,
    BLOCK_MAP,
    BLOCK_SPREADS,
    BLOCK_TREE,
    BLOCK_POLICY
};

enum cell_type {
    CELL_EMPTY,
    CELL_TEXT,   /* text */
    CELL_NUMBER, /* number, in the column's unit */
    CELL_COUNT,  /* a whole number: number, printed without rounding */
    CELL_DATE,   /* text, YYYY-MM-DD */
    CELL_YES     /* number 1 or 0, printed as yes or no */
};

/* How a column of numbers is printed: three significant digits, always. Zeros at the end of a
 * fraction are printed where the number was rounded, and left out where it is exact (to twelve
 * digits): 1.40 and 12.0 were 1.398 and 12.02, 1.4 and 12 are just that. Whole numbers stay as
 * they are: 12300. */
enum number_style {
    STYLE_PLAIN,       /* below 0.01 and from 1e5 with an exponent: 0.0123, 1.23e-3, 12300,
                          1.23e5 */
    STYLE_MONEY,       /* prefix k, M or G chosen once for the column, "kEUR" in the head: that of
                          the largest amount, 1 to 999 of it; the next lower one where the largest
                          then has four digits before its point and the smallest would stand below
                          0.1 otherwise: 1570 and 29.9, not 1.57 and 0.0299. In it 12.4, -34.7
                          and 0.00895; an exponent below 0.001 alone. Without a unit no prefix:
                          8950000 */
    STYLE_FREQUENCY,   /* per year; below 0.1 with an exponent, as 2.94e-3, and, in a cell of
                          its own when there is room, as "1 in 340 a" */
    STYLE_PROBABILITY, /* as PLAIN: 0.0123, 4.1e-5, 1; more digits where a number below 1
                          would read as 1: 0.9999 (down to 1 - 1e-12) */
    STYLE_PERCENT,     /* the value 0.123 printed as 12.3 under the unit %; 99.99 as it is. JSON
                          and CSV have the pure number 0.123, without a unit */
    STYLE_RATIO,       /* 1.23 */
    STYLE_GROUPED,     /* as PLAIN, but without an exponent from 1e5 on, and in groups of three
                          digits: 12 300, 1 230 000; from 0.99 to 1 with three digits of what is
                          missing to 1, and six decimals: 0.999795 */
    STYLE_YEAR         /* a year and its part, with at most two decimals: 2027, 2031.25 */
};

struct cell {
    enum cell_type type;
    const char *text;   /* or NULL */
    double number;
    const char *figure; /* name of the figure, or NULL */
    const char *mark;   /* a short remark behind the cell such as "!" with a note, or NULL */
    const char *unit;         /* numbers of a BLOCK_PAIRS; a table's are its columns' */
    enum number_style style;
    int shift; /* in a column whose cells have styles of their own: the number is shown divided
                  by 10^shift */
};

struct column {
    const char *key;   /* in JSON and CSV: lower case with hyphens, unique in the table */
    const char *head;  /* "Risk" */
    const char *unit;  /* "EUR/a", "1/a", "" */
    enum number_style style;
    bool right;        /* text to the right (numbers always align on the point) */
    unsigned keep;     /* columns with a smaller number are dropped first when the page is
                          too narrow; 0 may never be dropped. JSON and CSV have them all */
    bool data;         /* only in JSON and CSV: what the page says otherwise, by a mark */
    bool own;          /* each number has the style and the shift of its cell, not the column's */
    bool drawn;        /* a picture of characters: texts keep their blanks and never wrap */
};

struct row ARRAY_BODY(struct cell);

/* A mark of the grid: a point with a label, and perhaps an arrow to another one. A part of
 * another mark is drawn hollow, and only where it finds room for itself and its label beside
 * the marks that are no parts; the key always has it. It has no arrow. */
struct grid_mark {
    const char *label;   /* short, printed beside the mark */
    const char *name;    /* long, printed in the key below */
    double frequency;    /* per year, > 0 (0: listed in the key as never) */
    double damage;       /* money, > 0 (0: listed in the key as without damage) */
    int arrow_from;      /* index of the mark that it starts from, -1: none */
    int part_of;         /* index of a mark before it that it is a part of, -1: none */
    const char *frequency_figure, *damage_figure;
};

struct grid_line {
    const char *name; /* "intolerable above 100 kEUR/a" */
    double risk;      /* money per year, > 0 */
    const char *symbol; /* one character that draws it */
};

struct grid {
    const char *currency;
    /* What a mark is, and what a part of one is, in words for the key; NULL: just that. */
    const char *wholes, *parts;
    ARRAY(struct grid_mark) marks;
    ARRAY(struct grid_line) lines;
};

/* An axis of a curve. */
struct curve_axis {
    const char *key;  /* in JSON and CSV: lower case with hyphens */
    const char *head; /* "Interval between tests" */
    const char *unit; /* "a", "EUR/a", "" */
    enum number_style style;
    bool log;         /* what is at or below 0 has no place on it and is told below the picture */
    bool from_data;   /* of a linear y axis: it begins near the least value, not at 0 */
};

/* Finite, at most 1e300 in size. */
struct curve_point {
    double x, y;
};

/* Points in ascending order of x, joined by straight lines on the page; two points
 * of one x are a jump. In steps, the value of a point holds up to the x of the next one and jumps
 * there, as distribution functions and exceedances of a few values do. */
struct curve_line {
    const char *name;
    const char *symbol; /* one printable ASCII character: draws it when there are several */
    const char *figure; /* name of the figure that it is, or NULL */
    bool steps;
    ARRAY(struct curve_point) points;
};

struct curve_mark {
    const char *label; /* "best" */
    double x, y;       /* as of a point */
    const char *x_figure, *y_figure;
};

struct curve {
    struct curve_axis x, y;
    ARRAY(struct curve_line) lines;
    ARRAY(struct curve_mark) marks;
};

/* How a result changes when one input moves from its low to its high end. */
struct swing {
    const char *label;    /* names the input */
    const char *words;    /* its two ends: "2e-3 .. 9e-3 per a" */
    double low, high;     /* the result with the input at its low and high end; as of a point */
    const char *low_figure, *high_figure;
    bool low_turns, high_turns; /* what `turns` says holds at that end */
};

/* Rows in the order in which they are given. */
struct swings {
    struct curve_axis axis; /* of the result; always linear */
    double today;           /* the result with every input as it is */
    const char *today_figure;
    const char *turns; /* what the mark of an end says: "the best choice changes at this end" */
    ARRAY(struct swing) rows;
};

struct map_choice {
    const char *name;
    const char *figure; /* or NULL */
    bool nothing;       /* doing nothing: a point, not a letter */
};

struct map_cell {
    size_t choice; /* its index */
    double worth;  /* what the choice is worth there */
};

/* Which choice is best where: a cell for each pair of an x and a y value. */
struct map {
    struct curve_axis x, y, worth;
    ARRAY(double) xs, ys; /* ascending */
    ARRAY(struct map_choice) choices;
    ARRAY(struct map_cell) cells; /* by rows: all x of the least y first */
    bool has_today;
    double today_x, today_y; /* as of a point */
    const char *today_x_figure, *today_y_figure;
};

struct spread_value {
    double value;       /* as of a point */
    double error;       /* standard error of the value; below 0: none is known */
    const char *figure; /* or NULL */
};

enum spread_part { SPREAD_MEAN, SPREAD_LOW, SPREAD_MEDIAN, SPREAD_HIGH, SPREAD_PARTS };

/* A number that is not known well: its mean, and the values that it is below with 5, 50 and
 * 95 %. */
struct spread {
    const char *label, *unit;
    enum number_style style;
    struct spread_value parts[SPREAD_PARTS];
};

struct spreads ARRAY_BODY(struct spread);

enum tree_kind { TREE_CHOOSE, TREE_CHANCE, TREE_END };

/* A node of a tree of choices and chances, with the branch that leads to it. Numbers are finite. */
struct tree_node {
    enum tree_kind kind;
    const char *label;    /* of the branch: "survey-first"; of the root: what is asked */
    const char *steps;    /* what happens on the branch, in words: "pay 15 kEUR; wait 3 month", or
                          NULL */
    bool has_probability; /* the branch leaves a chance */
    double probability;
    const char *probability_figure;
    double value; /* of the node, in the tree's unit */
    const char *value_figure;
    double reach; /* probability of getting here when the best branches are taken */
    const char *reach_figure;
    bool best;           /* the branch to take at its parent, a choice; the root is best */
    bool folded;         /* pages do not show its children, but say how many ends lie below */
    size_t ends;         /* below it */
    const char *same_as; /* the path of labels of a node that this one repeats,
                            "survey-first.poor", or NULL */
    ARRAY(struct tree_node *) children;
};

struct tree {
    const char *unit, *value_head;
    enum number_style style;
    struct tree_node *root; /* or NULL */
};

/* One of the things that can be done. */
struct policy_action {
    const char *name;
    bool nothing; /* doing nothing: a point, not a letter */
};

#define POLICY_NONE SIZE_MAX /* no action: the condition cannot hold at that time */

struct policy_cell {
    size_t action; /* its index, or POLICY_NONE */
    double reach;  /* probability of being there, 0 to 1 */
    const char *figure;
};

/* What to do when: a row for each condition, a column for each time. */
struct policy {
    ARRAY(struct policy_action) actions;
    ARRAY(const char *) times;
    ARRAY(const char *) conditions;
    ARRAY(struct policy_cell) cells; /* by rows, once there are all conditions and times */
};

struct block {
    enum block_type type;
    const char *key;     /* in JSON: names the block; NULL: not printed there (headings) */
    const char *title;   /* heading text, table title, or NULL */
    int level;           /* headings: 1, 2, 3 */
    const char *text;    /* BLOCK_NOTE: a paragraph, filled to the width; lines that begin with
                            two blanks are kept as they are */
    ARRAY(struct column)
    columns; /* BLOCK_TABLE; BLOCK_PAIRS has two: name, value;
                                     BLOCK_SIGNATURES three: role, name, date */
    ARRAY(struct row) rows;
    bool entries;        /* BLOCK_TABLE: in text each row is an entry: a line of the columns that
                            may never be dropped, and below it, indented, the others from keep 4
                            on that are not empty, each behind its head */
    struct grid *grid;   /* BLOCK_GRID */
    struct curve *curve; /* BLOCK_CURVE */
    struct swings *swings;   /* BLOCK_SWINGS */
    struct map *map;         /* BLOCK_MAP */
    struct spreads *spreads; /* BLOCK_SPREADS */
    struct tree *tree;       /* BLOCK_TREE */
    struct policy *policy;   /* BLOCK_POLICY */
};

struct report {
    struct arena *arena;
    ARRAY(struct block) blocks;
};

void report_init(struct report *r, struct arena *a);

struct block *report_heading(struct report *r, int level, const char *title);
struct block *report_note(struct report *r, const char *key, const char *format, ...)
    __attribute__((format(printf, 3, 4)));
struct block *report_pairs(struct report *r, const char *key, const char *title);
struct block *report_table(struct report *r, const char *key, const char *title);
struct block *report_grid(struct report *r, const char *key, const char *title,
                          const char *currency);
/* Both axes are plain and linear, without key, head and unit, until they are set. */
struct block *report_curve(struct report *r, const char *key, const char *title);

/* Horizontal bars from the value of today. The axis as of a curve. */
struct block *report_swings(struct report *r, const char *key, const char *title, double today,
                            const char *today_figure);
/* A map in two directions. Its axes as of a curve. */
struct block *report_map(struct report *r, const char *key, const char *title);
/* Numbers with their ranges from 5 to 95 %. */
struct block *report_spreads(struct report *r, const char *key, const char *title);

/* Choices and chances, and what they are worth: `head` names the values ("Worth"), which are in
 * `unit`. */
struct block *report_tree(struct report *r, const char *key, const char *title, const char *unit,
                          enum number_style style, const char *head);
/* What to do, by condition and time. */
struct block *report_policy(struct report *r, const char *key, const char *title);

/* Lines to be signed on paper: for each of the n roles ("Checked") one for a name and one for a
 * date. JSON and CSV have a row for each, its name and date empty. */
struct block *report_signatures(struct report *r, const char *key, const char *title,
                                const char *const *roles, size_t n);

/* Adds a column to a table; returns it, for `right` and `keep`. Pointers into a
 * block are valid until the next addition to the same array. */
struct column *block_column(struct report *r, struct block *b, const char *key, const char *head,
                            const char *unit, enum number_style style);
struct row *block_row(struct report *r, struct block *b);
struct cell *row_text(struct report *r, struct row *row, const char *text);
struct cell *row_number(struct report *r, struct row *row, double number, const char *figure);
struct cell *row_count(struct report *r, struct row *row, uint64_t n);
struct cell *row_date(struct report *r, struct row *row, const char *date); /* YYYY-MM-DD */
struct cell *row_yes(struct report *r, struct row *row, bool yes);
struct cell *row_empty(struct report *r, struct row *row);
/* A named value of a BLOCK_PAIRS: its name, then one cell by the functions above;
 * a number's unit and style are given here. */
struct row *block_pair(struct report *r, struct block *b, const char *name);
struct cell *pair_number(struct report *r, struct row *row, double number, const char *unit,
                         enum number_style style, const char *figure);

/* A mark (a whole one, without an arrow and figures: set them in the result) and a line of a
 * grid. */
struct grid_mark *grid_add_mark(struct report *r, struct block *b, const char *label,
                                const char *name, double frequency, double damage);
struct grid_line *grid_add_line(struct report *r, struct block *b, const char *name, double risk,
                                const char *symbol);

/* The axes of a curve; set `log` and `from_data` in the result. */
struct curve_axis *curve_set_x(struct report *r, struct block *b, const char *key,
                               const char *head, const char *unit, enum number_style style);
struct curve_axis *curve_set_y(struct report *r, struct block *b, const char *key,
                               const char *head, const char *unit, enum number_style style);
/* A line without points and figure, not in steps, and a mark without figures: set them in the
 * result. */
struct curve_line *curve_add_line(struct report *r, struct block *b, const char *name,
                                  const char *symbol);
/* x is not below that of the line's last point (asserted, as are finite numbers). */
void curve_add_point(struct report *r, struct curve_line *line, double x, double y);
struct curve_mark *curve_add_mark(struct report *r, struct block *b, const char *label, double x,
                                  double y);

struct curve_axis *swings_set_axis(struct report *r, struct block *b, const char *key,
                                   const char *head, const char *unit, enum number_style style);
/* What the mark of an end says in the key. */
void swings_set_turns(struct report *r, struct block *b, const char *words);
/* A row without figures and marks: set them in the result. */
struct swing *swings_add(struct report *r, struct block *b, const char *label, const char *words,
                         double low, double high);

struct curve_axis *map_set_x(struct report *r, struct block *b, const char *key, const char *head,
                             const char *unit, enum number_style style);
struct curve_axis *map_set_y(struct report *r, struct block *b, const char *key, const char *head,
                             const char *unit, enum number_style style);
/* Of what the choices are worth; only its key, head, unit and style count. */
struct curve_axis *map_set_worth(struct report *r, struct block *b, const char *key,
                                 const char *head, const char *unit, enum number_style style);
/* The next value of an axis, above the one before it (asserted). */
void map_add_x(struct report *r, struct block *b, double x);
void map_add_y(struct report *r, struct block *b, double y);
struct map_choice *map_add_choice(struct report *r, struct block *b, const char *name,
                                  bool nothing);
/* The next cell; its choice is there already (asserted). A map is drawn when it has all. */
void map_add_cell(struct report *r, struct block *b, size_t choice, double worth);
/* Set the figures in the map. */
void map_set_today(struct block *b, double x, double y);
/* Whether there is a cell for each x and y, and at least one. */
bool map_is_whole(const struct map *m);

/* A row whose values are all 0, without errors and figures, until they are set. */
struct spread *spreads_add(struct report *r, struct block *b, const char *label, const char *unit,
                           enum number_style style);
void spread_set(struct report *r, struct spread *s, enum spread_part part, double value,
                double error, const char *figure);

/* A node below its parent (NULL: the root, of which there is one), without steps, numbers, figures
 * and marks: set them in the result, which stays where it is. */
struct tree_node *tree_add(struct report *r, struct block *b, struct tree_node *parent,
                           enum tree_kind kind, const char *label);

struct policy_action *policy_add_action(struct report *r, struct block *b, const char *name,
                                        bool nothing);
/* All times and conditions are added before the first cell is set (asserted). */
void policy_add_time(struct report *r, struct block *b, const char *label);
void policy_add_condition(struct report *r, struct block *b, const char *label);
/* Cells that are not set have no action and are never reached. figure: NULL, or the name of that
 * which chose the action. */
void policy_set(struct report *r, struct block *b, size_t condition, size_t time, size_t action,
                double reach, const char *figure);
/* Whether there is a condition and a time. */
bool policy_is_whole(const struct policy *p);

struct report_format {
    unsigned width; /* columns: 60..200 */
    bool ascii;     /* only ASCII characters */
    bool colour;    /* SGR sequences beside, never instead of, letters and marks */
};

void report_write_text(struct text *out, const struct report *r, const struct report_format *f);
/* One JSON object: {"blocks": [...]}, every cell as {"value": ..., "unit": ..., "figure": ...}
 * or plain text, the points of a curve as [x, y] in the units of its axes, the cells of a map
 * as rows of the indices of its choices; stable key order; ends in a newline. */
void report_write_json(struct text *out, const struct report *r);
/* Every table of the report as RFC 4180 rows under a header of keys (with "-UNIT"
 * appended where a unit is known: risk-EUR/a), every grid as a table of its marks, and every
 * curve as a table of line, mark, x and y: a row for each point, without a mark, then one for
 * each mark, without a line. Swings and spreads have a row for each of their rows, maps one for
 * each cell. Tables are parted by an empty line. */
void report_write_csv(struct text *out, const struct report *r);

/* One page of HTML that needs nothing else and runs nothing: the blocks in their order, with
 * contents, and grids, curves, swings and maps as pictures (SVG) with their numbers in tables
 * below; of spreads a strip in each row of their table. Every number is rounded as in the text,
 * and carries the name of its figure in `data-figure`. For screens from 320 pixels and for
 * paper. */
void report_write_html(struct text *out, const struct report *r);

/* The parts that other writers and tests use: three significant digits of the exact
 * double, rounded half to even; -0 is 0, an infinity "infinite". buf: 32 bytes. */
char *number_text(char *buf, double x, enum number_style style);
/* One amount with its unit, as "12.3 kEUR/a"; unit "EUR/a". */
const char *money_text(struct arena *a, double x, const char *unit);
/* "1 in 340 a" for 2.94e-3 per year; "3.1 per a" from 1 per year; "never" for 0;
 * "undefined" below 0. buf: 32 bytes. */
char *return_period_text(char *buf, double per_year);

#endif
