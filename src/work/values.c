/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Values for people: in which unit a figure is shown, and where it comes from. */
#include <math.h>
#include <string.h>

#include "work/work.h"

const char *display_unit(struct job *j, struct dim d, double value, double *shown)
{
    double hours = value * 8760;
    if (dim_equal(d, dim_time) && value != 0 && fabs(value) < 1) {
        bool seconds = fabs(hours) < 1.0 / 60, minutes = fabs(hours) < 1;
        *shown = seconds ? hours * 3600 : minutes ? hours * 60 : hours;
        return seconds ? "s" : minutes ? "min" : "h";
    }
    if (dim_equal(d, dim_energy)) {
        *shown = hours;
        return "kWh";
    }
    *shown = value;
    return dim_unit(j->arena, &j->model->units, d);
}

static bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

/* Where a literal that begins at s ends at the latest. */
static size_t literal_length(const char *s)
{
    static const char *const ends[] = {",", ";", ")", " ..", " as ", " * ", " + ", " - ", " / "};
    size_t n = strlen(s);
    for (size_t i = 0; i < sizeof ends / sizeof *ends; i++) {
        const char *end = strstr(s, ends[i]);
        if (end && (size_t)(end - s) < n)
            n = (size_t)(end - s);
    }
    return n;
}

/* Is every number in the unit a power of ten? "per 100 km a" is one to be read, "per 167459
 * transformer a" is not. */
static bool is_readable(const char *unit)
{
    for (const char *p = unit; *p; p++) {
        bool begins = is_digit(*p) && (p == unit || p[-1] == ' ' || p[-1] == '/');
        if (!begins)
            continue;
        size_t n = *p == '1' ? 1 + strspn(p + 1, "0") : 0;
        if (n == 0 || is_digit(p[n]) || p[n] == '.')
            return false;
    }
    return true;
}

/* What a text states of a figure: the last literal in it that has the dimension wanted, as
 * "100 kEUR/s" in "uniform, from 30 kEUR/s, to 100 kEUR/s". */
struct stated {
    const char *unit; /* NULL: there is none */
    double number, value;
};

static struct stated last_stated(struct job *j, const char *text, struct dim d)
{
    struct diags quiet;
    struct stated last = {0};
    diags_init(&quiet, j->arena);
    for (const char *p = text; *p; p++) {
        bool begins = is_digit(*p) && (p == text || p[-1] == ' ' || p[-1] == '(');
        if (!begins)
            continue;
        const char *literal = arena_strn(j->arena, p, literal_length(p));
        struct expr *e = expr_parse(j->arena, &j->model->units, literal,
                                    (struct place){.file = "", .line = 1, .column = 1}, &quiet);
        const char *blank = e && e->op == EXPR_LITERAL ? strchr(e->text, ' ') : NULL;
        double number;
        if (!blank || !dim_equal(e->dim, d) || !text_to_double(e->text, blank, &number) ||
            number == 0 || !is_readable(blank + 1))
            continue;
        last = (struct stated){blank + 1, number, e->value};
    }
    return last;
}

/* Units in which the trade counts: hours of customers, minutes of one, and MWh. */
static const struct customary {
    enum property property;
    const char *unit;
    double per_base; /* of these in one of the base unit */
} customary[] = {
    {PROPERTY_CUSTOMER_TIME, "h", 8760}, {PROPERTY_AVOIDS_TIME, "h", 8760},
    {PROPERTY_PRESENT_TIME, "h", 8760},  {PROPERTY_SAIDI, "min", 525600},
    {PROPERTY_CAIDI, "min", 525600},     {PROPERTY_NOT_SUPPLIED, "MWh", 8.76}, /* of kWa */
};

/* How a property is shown whatever its size; NULL: by its size. */
static const struct customary *customary_of(enum property p)
{
    for (size_t i = 0; i < sizeof customary / sizeof *customary; i++)
        if (customary[i].property == p)
            return &customary[i];
    return NULL;
}

const char *figure_unit(struct job *j, figure_id id)
{
    double unused;
    return figure_display(j, id, &unused);
}

double figure_shown(struct job *j, figure_id id, double value)
{
    double shown, whole = figure_value(j->figures, id);
    figure_display(j, id, &shown);
    return whole == 0 ? value : value * (shown / whole);
}

enum number_style figure_style(struct job *j, figure_id id)
{
    enum property p = figure_at(j->figures, id)->property;
    return p == PROPERTY_ASAI || customary_of(p) ? STYLE_GROUPED : STYLE_PLAIN;
}

const char *figure_display(struct job *j, figure_id id, double *shown)
{
    const struct figure *g = figure_at(j->figures, id);
    struct dim d = figure_dim(j->figures, id);
    double value = figure_value(j->figures, id);
    struct stated s = {0};
    const struct customary *c = customary_of(g->property);
    if (c) {
        *shown = value * c->per_base;
        return c->unit;
    }
    if (g->property == PROPERTY_PER_HOUR) {
        *shown = value / HOURS_PER_YEAR;
        return arena_printf(j->arena, "%s/h", j->model->settings->currency);
    }
    if (g->text)
        s = last_stated(j, g->text, d);
    if (!s.unit) {
        const char *unit = display_unit(j, d, value, shown);
        return text_starts(unit, "1/") ? arena_printf(j->arena, "per %s", unit + 2) : unit;
    }
    *shown = value == s.value ? s.number : value / (s.value / s.number);
    return s.unit;
}

const char *figure_words(struct job *j, figure_id id, double value)
{
    char number[32];
    const char *unit = figure_unit(j, id);
    double shown = figure_shown(j, id, value);
    if (text_starts(unit, j->model->settings->currency))
        return money_text(j->arena, shown, unit);
    number_text(number, shown, STYLE_PLAIN);
    return arena_printf(j->arena, "%s%s%s", number, *unit ? " " : "", unit);
}

const char *figure_source(struct job *j, figure_id id)
{
    const struct figure *g = figure_at(j->figures, id);
    figure_id first = j->figures->of_node.at[g->node];
    struct figure_ids inputs = {0};
    if (!g->source && first != id)
        return figure_source(j, first);
    if (g->source)
        return g->source;
    figure_inputs(j->figures, j->arena, id, &inputs);
    return inputs.n ? "" : "none";
}

const char *figure_subject(const struct job *j, figure_id id)
{
    const struct figure *g = figure_at(j->figures, id);
    const struct object *o = j->figures->units.at[g->unit]->object;
    return !o || o->kind == KIND_REGISTER ? properties[g->property].help : object_name(o);
}
