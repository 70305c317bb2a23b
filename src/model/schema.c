/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The schema as a tree of nodes, built from the field tables and then written out.
 *
 * Every table has a definition; it has a second one, "part-of-...", for the inside of
 * changes and for objects that start from another one (`like`): nothing is required
 * there, `no` removes, and sets may be maps. Invariant: definitions are in the order of
 * tables_all, keys in the order in which they are put. */
#include "model/schema.h"

#include "model/schema_text.h"
#include "model/tables_all.h"

struct schema {
    struct arena *arena;
    bool part; /* the definitions for parts of objects are being made */
};

/* --- building --- */

static struct node *new_map(const struct schema *s)
{
    return node_map(s->arena, (struct place){0});
}

static struct node *new_list(const struct schema *s)
{
    return node_list(s->arena, (struct place){0});
}

static struct node *text(const struct schema *s, const char *string)
{
    return node_scalar(s->arena, FORM_TEXT, string, (struct place){0});
}

static struct node *number(const struct schema *s, int64_t n)
{
    const char *digits = arena_printf(s->arena, "%lld", (long long)n);
    return node_scalar(s->arena, FORM_COUNT, digits, (struct place){0});
}

static struct node *truth(const struct schema *s, bool yes)
{
    return node_scalar(s->arena, yes ? FORM_YES : FORM_NO, yes ? "yes" : "no", (struct place){0});
}

/* Puts a pair and returns the map. */
static struct node *put(const struct schema *s, struct node *map, const char *key,
                        struct node *value)
{
    node_add(s->arena, map, key, (struct place){0}, value);
    return map;
}

static struct node *texts(const struct schema *s, size_t n, const char *const *strings)
{
    struct node *list = new_list(s);
    for (size_t i = 0; i < n; i++)
        node_push(s->arena, list, text(s, strings[i]));
    return list;
}

static struct node *one_key(const struct schema *s, const char *key, struct node *value)
{
    return put(s, new_map(s), key, value);
}

/* {"$ref": "#/$defs/prefix + name"}; blanks of a name become hyphens. */
static const char *defined(const struct schema *s, const char *prefix, const char *name)
{
    char *def = arena_printf(s->arena, "%s%s", prefix, name);
    for (char *p = def; *p; p++)
        if (*p == ' ')
            *p = '-';
    return def;
}

static struct node *ref(const struct schema *s, const char *prefix, const char *name)
{
    return one_key(s, "$ref",
                   text(s, arena_printf(s->arena, "#/$defs/%s", defined(s, prefix, name))));
}

static struct node *either(const struct schema *s, struct node *first, struct node *second)
{
    struct node *list = new_list(s);
    node_push(s->arena, list, first);
    node_push(s->arena, list, second);
    return one_key(s, "anyOf", list);
}

static struct node *typed(const struct schema *s, const char *type)
{
    return one_key(s, "type", text(s, type));
}

static struct node *pattern(const struct schema *s, const char *expression)
{
    return put(s, typed(s, "string"), "pattern", text(s, expression));
}

static struct node *array_of(const struct schema *s, struct node *items)
{
    return put(s, typed(s, "array"), "items", items);
}

static struct node *map_of(const struct schema *s, struct node *names, struct node *values)
{
    struct node *map = put(s, typed(s, "object"), "propertyNames", names);
    return put(s, map, "additionalProperties", values);
}

/* --- fields --- */

static const char *prefix(const struct schema *s)
{
    return s->part ? "part-of-" : "";
}

static struct node *field_schema(const struct schema *s, const struct field *f);

static struct node *count_schema(const struct schema *s, const struct field *f)
{
    struct node *whole = put(s, typed(s, "integer"), "minimum", number(s, f->low));
    if (f->high)
        put(s, whole, "maximum", number(s, f->high));
    return either(s, whole, pattern(s, "^[0-9]{1,16}$"));
}

static struct node *set_schema(const struct schema *s, const struct field *f)
{
    struct node *list = array_of(s, ref(s, "", "name"));
    if (f->type == FIELD_ORDERED)
        return list;
    put(s, list, "uniqueItems", truth(s, true));
    return s->part ? either(s, list, map_of(s, ref(s, "", "name"), ref(s, "", "yes-or-no"))) : list;
}

static struct node *word_schema(const struct schema *s, const struct field *f)
{
    size_t n = 0;
    while (f->words[n])
        n++;
    return one_key(s, "enum", texts(s, n, f->words));
}

static struct node *quantity_schema(const struct schema *s, const struct field *f)
{
    if (s->part)
        return ref(s, "part-of-", "quantity");
    return ref(s, "", f->flags & (CERTAIN | CONSTANT) ? "certain-quantity" : "quantity");
}

/* A table by its definition, or by its short form. */
static struct node *table_schema(const struct schema *s, const struct table *t)
{
    struct node *whole = ref(s, prefix(s), t->name);
    if (!t->short_key)
        return whole;
    return either(s, whole, field_schema(s, table_field(t, t->short_key)));
}

static struct node *rows_schema(const struct schema *s, const struct field *f)
{
    struct node *names = f->year_keys ? pattern(s, "^[0-9]{4}$") : ref(s, "", "name");
    return map_of(s, names, field_schema(s, f->part));
}

static struct node *list_schema(const struct schema *s, const struct field *f)
{
    struct node *list = array_of(s, field_schema(s, f->part));
    if (f->part->type != FIELD_STRUCT)
        return list;
    return either(s, list, table_schema(s, f->part->table)); /* one alone */
}

static struct node *type_schema(const struct schema *s, const struct field *f)
{
    switch (f->type) {
    case FIELD_TEXT:
    case FIELD_UNIT: return ref(s, "", "text");
    case FIELD_NAME:
    case FIELD_REF: return ref(s, "", "name");
    case FIELD_REFS:
    case FIELD_NAMES:
    case FIELD_ORDERED: return set_schema(s, f);
    case FIELD_WORD: return word_schema(s, f);
    case FIELD_YES: return ref(s, "", "yes-or-no");
    case FIELD_COUNT: return count_schema(s, f);
    case FIELD_DATE: return ref(s, "", "date");
    case FIELD_WHEN: return ref(s, "", "date-or-year");
    case FIELD_QUANTITY: return quantity_schema(s, f);
    case FIELD_STRUCT: return table_schema(s, f->table);
    case FIELD_ROWS: return rows_schema(s, f);
    case FIELD_LIST: return list_schema(s, f);
    case FIELD_STRUCTURE: return ref(s, "", "structure");
    case FIELD_CHANGE: return ref(s, "", "change");
    }
    return new_map(s);
}

static struct node *field_schema(const struct schema *s, const struct field *f)
{
    struct node *schema = type_schema(s, f);
    return s->part && f->type != FIELD_YES ? either(s, ref(s, "", "removal"), schema) : schema;
}

static const char *field_help(const struct schema *s, const struct field *f)
{
    return f->flags & LATER
               ? arena_printf(s->arena, "%s (stored; not used in the figures of this version)",
                              f->help)
               : f->help;
}

/* --- tables --- */

static const char *const structure_ops[] = {"all", "any"};

static void put_structure_keys(const struct schema *s, struct node *properties)
{
    for (size_t i = 0; i < 2; i++)
        put(s, properties, structure_ops[i], array_of(s, ref(s, "", "structure")));
    put(s, properties, "at-least", ref(s, "", "positive-count"));
    put(s, properties, "of", array_of(s, ref(s, "", "structure")));
}

static struct node *properties_schema(const struct schema *s, const struct table *t)
{
    struct node *properties = new_map(s);
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct field *f = &t->fields[i];
        struct node *value = one_key(s, "description", text(s, field_help(s, f)));
        const struct node *schema = field_schema(s, f);
        for (size_t k = 0; k < schema->n; k++)
            put(s, value, schema->pairs[k].key, schema->pairs[k].value);
        put(s, properties, f->key, value);
    }
    if (t->structure_keys)
        put_structure_keys(s, properties);
    return properties;
}

static struct node *requires(const struct schema *s, size_t n, const char *const *keys)
{
    return one_key(s, "required", texts(s, n, keys));
}

/* The short key, or the keys of a structure in its place. */
static struct node *structure_choice(const struct schema *s, const struct table *t)
{
    static const char *const vote[] = {"at-least", "of"};
    struct node *choices = new_list(s);
    node_push(s->arena, choices, requires(s, 1, &t->short_key));
    for (size_t i = 0; i < 2; i++)
        node_push(s->arena, choices, requires(s, 1, &structure_ops[i]));
    node_push(s->arena, choices, requires(s, 2, vote));
    return one_key(s, "oneOf", choices);
}

/* Exactly one of the keys, or at most one. */
static struct node *group_schema(const struct schema *s, const struct group *g)
{
    struct node *choices = new_list(s);
    for (size_t i = 0; i < 8 && g->keys[i]; i++)
        node_push(s->arena, choices, requires(s, 1, &g->keys[i]));
    struct node *any = one_key(s, "anyOf", choices);
    if (g->needed)
        return one_key(s, "oneOf", choices);
    struct node *one_or_none = new_list(s);
    for (size_t i = 0; i < choices->n; i++)
        node_push(s->arena, one_or_none, choices->items[i]);
    node_push(s->arena, one_or_none, one_key(s, "not", any));
    return one_key(s, "oneOf", one_or_none);
}

static void put_needs(const struct schema *s, const struct table *t, struct node *def)
{
    struct node *required = new_list(s), *all = new_list(s);
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct field *f = &t->fields[i];
        bool elsewhere = t->structure_keys && text_equal(f->key, t->short_key);
        if ((f->flags & REQUIRED) && !elsewhere)
            node_push(s->arena, required, text(s, f->key));
    }
    for (size_t i = 0; i < t->n_groups; i++)
        node_push(s->arena, all, group_schema(s, &t->groups[i]));
    if (t->structure_keys)
        node_push(s->arena, all, structure_choice(s, t));
    if (required->n)
        put(s, def, "required", required);
    if (all->n)
        put(s, def, "allOf", all);
}

static struct node *table_head(const struct schema *s, const struct table *t)
{
    return put(s, one_key(s, "description", text(s, t->help)), "type", text(s, "object"));
}

static void define_table(struct schema *s, const struct table *t, struct node *defs)
{
    s->part = false;
    struct node *whole = put(s, table_head(s, t), "properties", properties_schema(s, t));
    put_needs(s, t, whole);
    put(s, whole, "additionalProperties", truth(s, false));
    put(s, defs, defined(s, "", t->name), whole);
    s->part = true;
    struct node *part = put(s, table_head(s, t), "properties", properties_schema(s, t));
    put(s, defs, defined(s, "keys-of-", t->name), part);
    struct node *closed = ref(s, "keys-of-", t->name);
    put(s, closed, "unevaluatedProperties", truth(s, false));
    put(s, defs, defined(s, "part-of-", t->name), closed);
    s->part = false;
}

/* An object that starts from another one. */
static void define_like(const struct schema *s, const struct table *t, struct node *defs)
{
    static const char *const like[] = {"like"};
    struct node *start = ref(s, "", "name");
    put(s, start, "description", text(s, "The object of the same kind to start from"));
    struct node *def = ref(s, "keys-of-", t->name);
    put(s, def, "properties", one_key(s, "like", start));
    put(s, def, "required", texts(s, 1, like));
    put(s, def, "unevaluatedProperties", truth(s, false));
    put(s, defs, defined(s, "like-a-", t->name), def);
}

/* --- quantities --- */

static struct node *scalar_schema(const struct schema *s)
{
    static const char *const types[] = {"string", "number"};
    return one_key(s, "type", texts(s, 2, types));
}

static struct node *discrete_values(const struct schema *s)
{
    static const char *const keys[] = {"is", "p"};
    struct node *properties = put(s, new_map(s), keys[0], scalar_schema(s));
    put(s, properties, keys[1], scalar_schema(s));
    struct node *row = put(s, typed(s, "object"), "properties", properties);
    put(s, row, "required", texts(s, 2, keys));
    put(s, row, "additionalProperties", truth(s, false));
    return map_of(s, ref(s, "", "name"), row);
}

/* The keys of a discrete distribution are rows by name, each a value and its p. */
static struct node *shape_schema(const struct schema *s, const struct quantity_shape *shape)
{
    struct node *properties = new_map(s), *required = new_list(s);
    bool discrete = shape->shape == SHAPE_DISCRETE;
    put(s, properties, "shape", one_key(s, "const", text(s, shape->name)));
    if (!shape->unnamed)
        node_push(s->arena, required, text(s, "shape"));
    for (size_t i = 0; i < 3 && shape->keys[i] && !(discrete && i > 0); i++) {
        struct node *value = discrete ? discrete_values(s) : ref(s, "", "certain-quantity");
        put(s, properties, shape->keys[i], value);
        node_push(s->arena, required, text(s, shape->keys[i]));
    }
    if (shape->also)
        put(s, properties, shape->also, ref(s, "", "certain-quantity"));
    put(s, properties, "times", ref(s, "", "certain-quantity"));
    const char *help = discrete ? "One of a few values, each with its probability p; one p may be "
                                  "rest"
                                : shape->help;
    struct node *def = one_key(s, "description", text(s, help));
    put(s, def, "type", text(s, "object"));
    put(s, def, "properties", properties);
    put(s, def, "required", required);
    return put(s, def, "additionalProperties", truth(s, false));
}

/* {range: 90 % within A .. B, times: 0.5} */
static struct node *range_schema(const struct schema *s)
{
    static const char *const range[] = {"range"};
    struct node *properties = one_key(s, "range", typed(s, "string"));
    put(s, properties, "times", ref(s, "", "certain-quantity"));
    struct node *def = put(s, typed(s, "object"), "properties", properties);
    put(s, def, "required", texts(s, 1, range));
    return put(s, def, "additionalProperties", truth(s, false));
}

static struct node *distribution_schema(const struct schema *s)
{
    struct node *shapes = new_list(s);
    for (size_t i = 0; i < quantity_n_shapes; i++)
        node_push(s->arena, shapes, shape_schema(s, &quantity_shapes[i]));
    node_push(s->arena, shapes, range_schema(s));
    struct node *def = one_key(s, "description", text(s, "A distribution by its parameters"));
    return put(s, def, "oneOf", shapes);
}

/* Any keys of distributions, with any values: what they make together is seen only when
 * the change is applied. */
static struct node *distribution_part(const struct schema *s)
{
    struct node *values = either(s, ref(s, "", "removal"), scalar_schema(s));
    struct node *properties = one_key(s, "values", typed(s, "object"));
    put(s, properties, "shape", typed(s, "string"));
    put(s, properties, "times", values);
    put(s, properties, "range", values);
    for (size_t i = 0; i < quantity_n_shapes; i++) {
        const struct quantity_shape *shape = &quantity_shapes[i];
        const char *keys[] = {shape->keys[0], shape->keys[1], shape->keys[2], shape->also};
        for (size_t k = 0; k < 4 && shape->shape != SHAPE_DISCRETE; k++)
            if (keys[k] && !node_get(properties, keys[k]))
                put(s, properties, keys[k], values);
    }
    struct node *def = put(s, typed(s, "object"), "properties", properties);
    return put(s, def, "additionalProperties", truth(s, false));
}

static struct node *described(const struct schema *s, const char *help, struct node *schema)
{
    return put(s, schema, "description", text(s, help));
}

static void define_quantities(const struct schema *s, struct node *defs)
{
    struct node *certain =
        described(s, "A number with its unit, or an expression, such as 8 section * bus-fault",
                  scalar_schema(s));
    put(s, defs, "certain-quantity", certain);
    put(s, defs, "distribution", distribution_schema(s));
    put(s, defs, "quantity",
        described(s, "A number with its unit, an expression, a range, or a distribution",
                  either(s, scalar_schema(s), ref(s, "", "distribution"))));
    put(s, defs, "part-of-quantity",
        described(s, "A quantity, which may use was, or keys of a distribution",
                  either(s, scalar_schema(s), distribution_part(s))));
}

/* --- scalars, structures, changes --- */

static void define_scalars(const struct schema *s, struct node *defs)
{
    static const char *const any[] = {"string", "number", "boolean"};
    struct node *name = pattern(s, "^[A-Za-z]([A-Za-z0-9-]*[A-Za-z0-9])?$");
    struct node *yes_or_no = new_list(s), *removal = new_list(s);
    const char *const words[] = {"yes", "no"};
    for (int i = 0; i < 2; i++) {
        node_push(s->arena, yes_or_no, text(s, words[i]));
        node_push(s->arena, yes_or_no, truth(s, i == 0));
    }
    node_push(s->arena, removal, text(s, "no"));
    node_push(s->arena, removal, truth(s, false));
    put(s, defs, "text", one_key(s, "type", texts(s, 3, any)));
    put(s, defs, "name", put(s, name, "maxLength", number(s, 64)));
    put(s, defs, "yes-or-no", one_key(s, "enum", yes_or_no));
    put(s, defs, "removal", described(s, "Takes away what was", one_key(s, "enum", removal)));
    put(s, defs, "date", pattern(s, "^[0-9]{4}-[0-9]{2}-[0-9]{2}$"));
    put(s, defs, "date-or-year",
        either(s, typed(s, "integer"), pattern(s, "^[0-9]{4}(-[0-9]{2}-[0-9]{2})?$")));
    put(s, defs, "positive-count",
        either(s, put(s, typed(s, "integer"), "minimum", number(s, 1)),
               pattern(s, "^0*[1-9][0-9]*$")));
}

static struct node *closed_map(const struct schema *s, struct node *properties, size_t n,
                               const char *const *required)
{
    struct node *map = put(s, typed(s, "object"), "properties", properties);
    put(s, map, "required", texts(s, n, required));
    return put(s, map, "additionalProperties", truth(s, false));
}

/* Names, maps, and the canonical lists such as ["all", "A", "B"]. */
static struct node *structure_schema(const struct schema *s)
{
    static const char *const vote[] = {"at-least", "of"};
    struct node *forms = new_list(s);
    node_push(s->arena, forms, ref(s, "", "name"));
    for (size_t i = 0; i < 2; i++) {
        struct node *parts = array_of(s, ref(s, "", "structure"));
        put(s, parts, "minItems", number(s, 1));
        node_push(s->arena, forms,
                  closed_map(s, one_key(s, structure_ops[i], parts), 1, &structure_ops[i]));
    }
    struct node *properties = one_key(s, "at-least", ref(s, "", "positive-count"));
    put(s, properties, "of", array_of(s, ref(s, "", "structure")));
    node_push(s->arena, forms, closed_map(s, properties, 2, vote));
    node_push(s->arena, forms, put(s, typed(s, "array"), "minItems", number(s, 2)));
    struct node *def = one_key(
        s, "description",
        text(s, "Which elements and schemes must work: all, any, or at-least so many of them"));
    return put(s, def, "anyOf", forms);
}

static struct node *change_schema(struct schema *s)
{
    struct node *sections = new_map(s);
    s->part = true;
    for (int k = 0; k < KIND_COUNT; k++)
        if (kinds[k].computes) { /* src/model/bind_change.c refuses the rest */
            struct node *object = either(s, ref(s, "", "removal"), table_schema(s, kinds[k].table));
            put(s, sections, kinds[k].section, map_of(s, ref(s, "", "name"), object));
        }
    s->part = false;
    struct node *def =
        one_key(s, "description", text(s, "A part of a document that holds only what differs"));
    put(s, def, "type", text(s, "object"));
    put(s, def, "properties", sections);
    return put(s, def, "additionalProperties", truth(s, false));
}

/* --- sections --- */

static struct node *section_schema(const struct schema *s, int k)
{
    static const char *const like[] = {"like"};
    static const char *const map_or_nothing[] = {"object", "null"};
    const struct table *t = kinds[k].table;
    if (k == KIND_REGISTER)
        return ref(s, "", t->name);
    struct node *object =
        one_key(s, "if", put(s, typed(s, "object"), "required", texts(s, 1, like)));
    put(s, object, "then", ref(s, "like-a-", t->name));
    put(s, object, "else", table_schema(s, t));
    struct node *section = one_key(s, "description", text(s, t->help));
    put(s, section, "type", texts(s, 2, map_or_nothing));
    put(s, section, "propertyNames", ref(s, "", "name"));
    return put(s, section, "additionalProperties", object);
}

static struct node *sections_schema(const struct schema *s)
{
    struct node *sections = new_map(s);
    for (int k = 0; k < KIND_COUNT; k++)
        put(s, sections, kinds[k].section, section_schema(s, k));
    struct node *removed = array_of(s, ref(s, "", "name"));
    put(s, removed, "description", text(s, "Ids of objects to take out of the register"));
    return put(s, sections, "removed", removed);
}

static struct node *definitions(struct schema *s)
{
    struct node *defs = new_map(s);
    struct tables tables = {0};
    define_scalars(s, defs);
    define_quantities(s, defs);
    put(s, defs, "structure", structure_schema(s));
    put(s, defs, "change", change_schema(s));
    tables_all(s->arena, &tables);
    for (size_t i = 0; i < tables.n; i++)
        define_table(s, tables.at[i], defs);
    for (int k = 0; k < KIND_COUNT; k++)
        if (k != KIND_REGISTER)
            define_like(s, kinds[k].table, defs);
    return defs;
}

/* --- the document --- */

void schema_write(struct text *out)
{
    struct schema s = {.arena = out->arena};
    struct node *root =
        one_key(&s, "$schema", text(&s, "https://json-schema.org/draft/2020-12/schema"));
    put(&s, root, "title", text(&s, "Documents of an ohmen register"));
    put(&s, root, "description",
        text(&s, "Made from the field tables in src/model; docs/documents.md explains the keys."));
    put(&s, root, "type", text(&s, "object"));
    put(&s, root, "properties", sections_schema(&s));
    put(&s, root, "additionalProperties", truth(&s, false));
    put(&s, root, "$defs", definitions(&s));
    schema_text(out, root);
}
