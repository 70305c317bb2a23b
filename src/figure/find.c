/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Finding a figure by its name, and what this version does not use. */
#include <string.h>

#include "figure/importance.h"
#include "figure/over_hazards.h"
#include "figure/states.h"
#include "figure/upkeep.h"

/* "ID.rest@A+S=x+[name]" cut into its parts. */
struct name_parts {
    const char *id, *rest; /* rest: "risk.slow" */
    ARRAY(const char *) options, states, made_up;
};

/* The change that starts at `from`; where it ends. What is made up may have any sign in it. */
static const char *cut_change(struct arena *a, const char *from, struct name_parts *p)
{
    const char *end = *from == '[' ? strchr(from, ']') : NULL;
    size_t n = end ? (size_t)(end + 1 - from) : strcspn(from, "+");
    const char *name = arena_strn(a, from, n);
    if (end)
        *array_push(a, &p->made_up) = name;
    else if (strchr(name, '='))
        *array_push(a, &p->states) = name;
    else
        *array_push(a, &p->options) = name;
    return from + n;
}

static void cut_name(struct arena *a, const char *name, struct name_parts *p)
{
    const char *at = strchr(name, '@');
    const char *head = at ? arena_strn(a, name, (size_t)(at - name)) : name;
    const char *dot = strchr(head, '.');
    *p = (struct name_parts){.id = head, .rest = ""};
    if (dot) {
        p->id = arena_strn(a, head, (size_t)(dot - head));
        p->rest = dot + 1;
    }
    while (at && *at)
        at = cut_change(a, at + 1, p);
}

/* The variant that a name means. */
static ohmen_status named_variant(struct figures *f, const struct name_parts *p,
                                  const struct variant **v, ohmen_error *e)
{
    ohmen_status status = figures_variant(f, p->options.n, p->options.at, v, e);
    for (size_t i = 0; status == OHMEN_OK && i < p->made_up.n; i++) {
        const struct change *c = strmap_get(&f->made_up, p->made_up.at[i]);
        if (!c)
            return error_set(e, OHMEN_UNKNOWN, "nobody made up the change %s", p->made_up.at[i]);
        status = variant_made_up(f, *v, c, v, e);
    }
    for (size_t i = 0; status == OHMEN_OK && i < p->states.n; i++)
        status = figures_variant_in(f, *v, p->states.at[i], v, e);
    return status;
}

static ohmen_status unknown_object(struct figures *f, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    for (size_t i = 0; i < f->base->by_id.n; i++)
        nearest_offer(&near, f->base->by_id.at[i].key);
    return error_set(e, OHMEN_UNKNOWN, "there is no \"%s\" in the register%s", id,
                     nearest_hint(f->arena, &near));
}

static const char *without_variant(struct arena *a, const char *name)
{
    const char *at = strchr(name, '@');
    return at ? arena_strn(a, name, (size_t)(at - name)) : name;
}

/* Is `word` what stands before the first dot? */
static bool begins_with(const char *rest, const char *word)
{
    size_t n = strlen(word);
    return strncmp(rest, word, n) == 0 && (rest[n] == 0 || rest[n] == '.');
}

/* The unit that a part belongs to; itself. */
static const struct compiled *main_unit(const struct compiled *u)
{
    while (u->part && u->also)
        u = u->also;
    return u;
}

static bool is_mean(const struct compiled *u)
{
    return !u->part && u->object && u->object->kind == KIND_HAZARD &&
           ((const struct hazard_exports *)u->exports)->n_states;
}

/* Is it asked for what a mean has not? Its consequences are means too, but not what belongs to
 * single ends. */
static bool is_of_one_state(const struct compiled *u, const char *rest)
{
    return !u->part || begins_with(rest, properties[PROPERTY_DAMAGE].word) ||
           begins_with(rest, properties[PROPERTY_CLEARANCE].word);
}

/* Ends and what belongs to them are those of one state. */
static ohmen_status unknown_of_mean(struct figures *f, const struct compiled *u, const char *rest,
                                    ohmen_error *e)
{
    const struct hazard_exports *x = u->exports;
    const struct compiled *first = NULL;
    for (size_t i = 0; i < x->n_states && !first; i++)
        first = x->states[i].unit;
    const char *name = figure_name(f, f->arena, first->main);
    return error_set(
        e, OHMEN_UNKNOWN,
        "\"%s\" has no figure \"%s\": it is a mean over states, whose figures "
        "have their state in the name, as %s",
        u->id, rest, name);
}

ohmen_status compiled_find(struct figures *f, const struct compiled *u, const char *rest,
                           figure_id *out, ohmen_error *e)
{
    const char *wanted = arena_printf(f->arena, "%s.%s", u->id, rest);
    struct nearest near;
    nearest_init(&near, rest);
    for (const struct compiled *part = u; part; part = part->also)
        for (figure_id i = part->first; i < part->first + part->n; i++) {
            const char *name = without_variant(f->arena, figure_name(f, f->arena, i));
            if (text_equal(name, wanted)) {
                *out = i;
                return OHMEN_OK;
            }
            nearest_offer(&near, name + strlen(u->id) + 1);
        }
    if (!*rest && u->main != FIGURE_NONE)
        return error_set(e, OHMEN_UNKNOWN, "\"%s\" is an object; its main figure is %s", u->id,
                         figure_name(f, f->arena, u->main));
    if (is_mean(main_unit(u)) && is_of_one_state(u, rest))
        return unknown_of_mean(f, main_unit(u), rest, e);
    return error_set(e, OHMEN_UNKNOWN, "\"%s\" has no figure \"%s\"%s", u->id, rest,
                     nearest_hint(f->arena, &near));
}

/* --- parts that are compiled only where somebody asks --- */

typedef ohmen_status compile_part(struct figures *f, const struct variant *v,
                                  const struct object *o, ohmen_error *e);

static const struct part {
    enum property property;
    unsigned kinds;
    const char *part;
    compile_part *compile;
} parts[] = {
#define REPAIRED(p)                                                                                \
    {                                                                                              \
        p, KIND_BIT(KIND_SCHEME), PART_REPAIRABLE, compile_repairable                              \
    }
#define ASSERTED(p, kinds)                                                                         \
    {                                                                                              \
        p, kinds, PART_UNWANTED, compile_unwanted                                                  \
    }
#define HARM(p)                                                                                    \
    {                                                                                              \
        p, KIND_BIT(KIND_HAZARD), PART_CONSEQUENCES, compile_consequences                          \
    }
#define AT_SITE(p)                                                                                 \
    {                                                                                              \
        p, KIND_BIT(KIND_SITE), PART_SITE, compile_site_sums                                       \
    }
#define STATED (KIND_BIT(KIND_ELEMENT) | KIND_BIT(KIND_TYPE))
    ASSERTED(PROPERTY_UNWANTED, KIND_BIT(KIND_SCHEME) | STATED),
    ASSERTED(PROPERTY_UNWANTED_PER_EVENT, KIND_BIT(KIND_SCHEME) | STATED),
    ASSERTED(PROPERTY_ASSERTS, KIND_BIT(KIND_SCHEME)),
    REPAIRED(PROPERTY_AVAILABILITY),
    REPAIRED(PROPERTY_UNAVAILABILITY),
    REPAIRED(PROPERTY_FAILURE_FREQUENCY),
    REPAIRED(PROPERTY_OUTAGE_TIME),
    HARM(PROPERTY_DAMAGE), /* items that the chosen perspective does not count */
    HARM(PROPERTY_CLEARANCE),
    HARM(PROPERTY_LASTS),
    HARM(PROPERTY_LOAD),
    HARM(PROPERTY_PRESENT),
    HARM(PROPERTY_DIES),
    HARM(PROPERTY_INJURED),
    HARM(PROPERTY_BORNE),
    HARM(PROPERTY_CATEGORY),
    HARM(PROPERTY_INTERRUPTIONS),
    HARM(PROPERTY_MOMENTARY),
    HARM(PROPERTY_CUSTOMER_TIME),
    HARM(PROPERTY_NOT_SUPPLIED),
    HARM(PROPERTY_DEATH),
    HARM(PROPERTY_INJURY),
    HARM(PROPERTY_FATALITIES),
    AT_SITE(PROPERTY_RISK),
    AT_SITE(PROPERTY_BORNE),
    AT_SITE(PROPERTY_CATEGORY),
    AT_SITE(PROPERTY_INTERRUPTIONS),
    AT_SITE(PROPERTY_MOMENTARY),
    AT_SITE(PROPERTY_CUSTOMER_TIME),
    AT_SITE(PROPERTY_NOT_SUPPLIED),
    AT_SITE(PROPERTY_SAIFI),
    AT_SITE(PROPERTY_SAIDI),
    AT_SITE(PROPERTY_MAIFI),
#undef AT_SITE
#undef HARM
#undef REPAIRED
#undef ASSERTED
#undef STATED
};

/* The part of an object in which such a figure is, or NULL. */
static const struct part *part_of(const struct object *o, const char *rest)
{
    for (size_t i = 0; i < sizeof parts / sizeof *parts; i++)
        if ((parts[i].kinds & KIND_BIT(o->kind)) &&
            begins_with(rest, properties[parts[i].property].word))
            return &parts[i];
    return NULL;
}

/* Goes from the main unit of an object to the part in which the figure is. */
static ohmen_status to_part(struct figures *f, const struct variant *v, const char *rest,
                            const struct compiled **u, ohmen_error *e)
{
    struct building under = {.figures = f, .variant = v};
    const struct part *p = part_of((*u)->object, rest);
    if (!p)
        return OHMEN_OK;
    ohmen_status status = p->compile(f, v, (*u)->object, e);
    if (status != OHMEN_OK)
        return status;
    struct compiled *part = (struct compiled *)compiled_part(&under, (*u)->id, p->part);
    part->also = *u;
    *u = part;
    return OHMEN_OK;
}

/* --- what is made of all hazards --- */

/* The parts of the register's figures that are sums over hazards, by property. */
static const char *register_part(const char *rest)
{
    static const struct {
        enum property property;
        const char *part;
    } sums[] = {{PROPERTY_RISK, PART_TOTAL},           {PROPERTY_BORNE, PART_ACCOUNTS},
                {PROPERTY_CATEGORY, PART_ACCOUNTS},    {PROPERTY_SAIFI, PART_SUPPLY},
                {PROPERTY_SAIDI, PART_SUPPLY},         {PROPERTY_CAIDI, PART_SUPPLY},
                {PROPERTY_ASAI, PART_SUPPLY},          {PROPERTY_MAIFI, PART_SUPPLY},
                {PROPERTY_INTERRUPTIONS, PART_SUPPLY}, {PROPERTY_MOMENTARY, PART_SUPPLY},
                {PROPERTY_CUSTOMER_TIME, PART_SUPPLY}, {PROPERTY_NOT_SUPPLIED, PART_SUPPLY}};
    for (size_t i = 0; i < sizeof sums / sizeof *sums; i++)
        if (begins_with(rest, properties[sums[i].property].word))
            return sums[i].part;
    return NULL;
}

/* The register's settings, or the part of it that has the figure. */
static ohmen_status register_unit(struct figures *f, const char *rest, const struct compiled **out,
                                  ohmen_error *e)
{
    const char *part = register_part(rest);
    struct over all;
    struct supply supply;
    struct accounts accounts;
    *out = figures_settings(f);
    if (!part)
        return OHMEN_OK;
    ohmen_status status = over_all_hazards(f, &all, e);
    if (status == OHMEN_OK && text_equal(part, PART_TOTAL))
        figures_total(f, all.n, all.hazards);
    if (status == OHMEN_OK && text_equal(part, PART_SUPPLY))
        status = figures_supply(f, all.n, all.hazards, &supply, e);
    if (status == OHMEN_OK && text_equal(part, PART_ACCOUNTS))
        status = figures_accounts(f, all.n, all.hazards, &accounts, e);
    struct building under = {.figures = f, .variant = (*out)->variant};
    if (status == OHMEN_OK)
        *out = compiled_part(&under, REGISTER_ID, part);
    return status;
}

static bool is_group(const struct figures *f, const char *id)
{
    return model_get(f->base, KIND_GROUP, id) != NULL;
}

static ohmen_status group_unit(struct figures *f, const char *id, const struct compiled **out,
                               ohmen_error *e)
{
    struct over all;
    struct harm_to *unused;
    ohmen_status status = over_all_hazards(f, &all, e);
    if (status == OHMEN_OK)
        status = figures_people(f, all.n, all.hazards, &unused, e);
    struct building under = {.figures = f, .variant = figures_settings(f)->variant};
    *out = status == OHMEN_OK ? compiled_of(&under, id) : NULL;
    return status;
}

/* Is the figure a sum over the hazards of the register as it is? */
static bool is_sum(const struct figures *f, const struct name_parts *p)
{
    const struct object *o = model_find(f->base, p->id);
    if (!o)
        return false;
    return (o->kind == KIND_REGISTER && register_part(p->rest)) || o->kind == KIND_GROUP ||
           (o->kind == KIND_SITE && part_of(o, p->rest));
}

static ohmen_status refuse_variant(const struct figures *f, const struct name_parts *p,
                                   ohmen_error *e)
{
    bool varied = p->options.n || p->states.n || p->made_up.n;
    if (!varied || !is_sum(f, p))
        return OHMEN_OK;
    return error_set(e, OHMEN_UNKNOWN,
                     "\"%s.%s\" is a sum over the hazards of the register as it is: it takes "
                     "neither options nor states",
                     p->id, p->rest);
}

/* What an element does beside its common causes, and figures of its upkeep where it is tested:
 * they are made when asked for. */
static ohmen_status add_parts(struct figures *f, const struct variant *v, const struct compiled *u,
                              ohmen_error *e)
{
    struct upkeep upkeep;
    const struct state_course *unused;
    if (u->object && u->object->kind == KIND_STATE && state_evolves(u->object->data))
        return compile_state_course(f, v->stem, u->id, &unused, e);
    if (!u->object || u->object->kind != KIND_ELEMENT)
        return OHMEN_OK;
    if (((const struct element_exports *)u->exports)->tested)
        upkeep_of(f, u, &upkeep);
    return compile_alone(f, v, u->id, e);
}

ohmen_status figures_find(struct figures *f, const char *name, figure_id *out, ohmen_error *e)
{
    struct name_parts p;
    const struct variant *v;
    const struct compiled *u;
    cut_name(f->arena, name, &p);
    ohmen_status status = named_variant(f, &p, &v, e);
    if (status == OHMEN_OK)
        status = refuse_variant(f, &p, e);
    if (status != OHMEN_OK)
        return status;
    if (text_equal(p.id, REGISTER_ID))
        status = register_unit(f, p.rest, &u, e);
    else if (is_group(f, p.id))
        status = group_unit(f, p.id, &u, e);
    else if (!model_find(v->model, p.id))
        return unknown_object(f, p.id, e);
    else
        status = figures_compile(f, v, p.id, &u, e);
    if (status == OHMEN_OK)
        status = add_parts(f, v, u, e);
    if (status == OHMEN_OK && u->object)
        status = to_part(f, v, p.rest, &u, e);
    return status == OHMEN_OK ? compiled_find(f, u, p.rest, out, e) : status;
}

/* --- the settings as a unit --- */

static void add_setting(struct building *b, enum property p, const struct quantity *q)
{
    if (q)
        compiled_add(b, p, NULL, NULL, compile_quantity(b, q), NULL, quantity_reads(b->figures, q));
}

static void add_people_criteria(struct building *b, const struct people_criteria *c)
{
    if (!c)
        return;
    add_setting(b, PROPERTY_FATALITY_WORTH, c->per_fatality);
    add_setting(b, PROPERTY_DISPROPORTION, c->disproportion);
}

const struct compiled *figures_settings(struct figures *f)
{
    const struct compiled *known = strmap_get(&f->compiled_by_key, REGISTER_ID);
    const struct variant *base;
    if (known || figures_variant(f, 0, NULL, &base, NULL) != OHMEN_OK)
        return known;
    const struct register_settings *s = f->base->settings;
    struct building b;
    compiled_begin(f, base, model_find(f->base, REGISTER_ID), REGISTER_ID, &b);
    compiled_add(&b, PROPERTY_DISCOUNT, NULL, NULL, compile_quantity(&b, s->discount), NULL,
                 quantity_reads(f, s->discount));
    add_people_criteria(&b, s->criteria ? s->criteria->people : NULL);
    compiled_end(&b);
    return b.unit;
}

/* --- what is not used --- */

struct looking {
    struct arena *arena;
    struct text keys;
};

static enum walk look_at_field(void *ctx, const struct visit *v)
{
    struct looking *l = ctx;
    if (!(v->field->flags & LATER))
        return WALK_INTO;
    text_printf(&l->keys, "%s%s", l->keys.n ? ", " : "", v->path);
    return WALK_PAST;
}

/* The keys of one object that are given but not used; "" when there are none. */
static const char *unused_keys(struct arena *a, const struct object *o)
{
    struct looking l = {.arena = a};
    struct walker w = {.ctx = &l, .enter = look_at_field};
    text_init(&l.keys, a);
    walk_table(a, kinds[o->kind].table, o->node, o->data, &w);
    return text_str(&l.keys);
}

static void add_unused(struct arena *a, const char *lead, const struct object *o,
                       struct unused *out)
{
    const char *keys = unused_keys(a, o);
    if (*keys)
        *array_push(a, out) = arena_printf(a, "%s%s: %s", lead, o->id, keys);
}

/* What a change brings into the register and this version does not use. */
static void unused_in_change(struct arena *a, const struct model *m, const struct model_change *c,
                             const char *id, struct unused *out)
{
    struct diags quiet;
    diags_init(&quiet, a);
    const struct model *v = model_change(a, m, 1, c, &quiet);
    const char *lead = arena_printf(a, "%s, in its change of ", id);
    for (size_t i = 0; v && i < v->by_id.n; i++) {
        const struct object *o = v->by_id.at[i].value;
        const struct object *before = o ? model_find(m, o->id) : NULL;
        if (o && (!before || !text_equal(unused_keys(a, before), unused_keys(a, o))))
            add_unused(a, lead, o, out);
    }
}

static void unused_in_state(struct arena *a, const struct model *m, const struct object *o,
                            struct unused *out)
{
    for (size_t i = 0; i < state_values(o->data)->n; i++) {
        struct model_change c = model_state_change(a, o, i);
        unused_in_change(a, m, &c, c.name, out);
    }
}

void figures_unused(struct arena *a, const struct model *m, struct unused *out)
{
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < m->of[k].n; i++) {
            const struct object *o = m->of[k].at[i];
            add_unused(a, "", o, out);
            if (k == KIND_STATE)
                unused_in_state(a, m, o, out);
            if (k != KIND_OPTION)
                continue;
            struct model_change c = model_option_change(m, o->id);
            unused_in_change(a, m, &c, o->id, out);
        }
}
