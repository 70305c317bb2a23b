/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Binding of changes (what an option does to the register), and the rules by which a
 * change is applied: `was`, sets of names, yes-or-no fields. */
#include "model/binder.h"

#include <math.h>
#include <string.h>

#include "doc/patch.h"

/* What a change may touch: all that computes. */
static bool is_changeable(enum kind k)
{
    return k < KIND_COUNT && kinds[k].computes;
}

static void unknown_section(struct binding *b, const struct pair *p)
{
    struct nearest near;
    nearest_init(&near, p->key);
    for (int k = 0; k < KIND_COUNT; k++)
        if (is_changeable((enum kind)k))
            nearest_offer(&near, kinds[k].section);
    bool known = kind_of_section(p->key) != KIND_COUNT;
    diag_add(b->diags, p->place,
             known ? "a change cannot touch \"%s\"%s" : "\"%s\" is no section%s", p->key,
             known ? "" : nearest_hint(b->arena, &near));
}

static struct node *bind_changed_object(struct binding *b, enum kind kind, const struct pair *p)
{
    if (!name_is_valid(b->units, p->key)) {
        diag_add(b->diags, p->place, "\"%s\" cannot be the id of an object", p->key);
        return NULL;
    }
    if (bind_is_removal(b, p->value))
        return node_scalar(b->arena, FORM_NO, "no", p->value->place);
    return bind_table(b, kinds[kind].table, p->value, NULL);
}

static struct node *bind_section(struct binding *b, enum kind kind, const struct node *section)
{
    if (section->type != NODE_MAP) {
        diag_add(b->diags, section->place, "expected a map of ids, found %s",
                 bind_node_words(section));
        return NULL;
    }
    bool fine = true;
    struct node *canonical = node_map(b->arena, section->place);
    for (size_t i = 0; i < section->n; i++) {
        const struct pair *p = &section->pairs[i];
        struct node *object = bind_changed_object(b, kind, p);
        fine = fine && object;
        if (object)
            node_add(b->arena, canonical, p->key, p->place, object);
    }
    node_sort(canonical);
    return fine ? canonical : NULL;
}

struct node *bind_change(struct binding *outer, const struct node *change)
{
    struct binding inner = *outer, *b = &inner;
    b->change = true;
    if (change->type != NODE_MAP) {
        diag_add(b->diags, change->place, "a change is a map of sections, found %s",
                 bind_node_words(change));
        return NULL;
    }
    bool fine = true;
    struct node *canonical = node_map(b->arena, change->place);
    for (size_t i = 0; i < change->n; i++) {
        const struct pair *p = &change->pairs[i];
        enum kind kind = kind_of_section(p->key);
        if (!is_changeable(kind)) {
            unknown_section(b, p);
            fine = false;
            continue;
        }
        struct node *section = bind_section(b, kind, p->value);
        fine = fine && section;
        if (section)
            node_add(b->arena, canonical, p->key, p->place, section);
    }
    node_sort(canonical);
    return fine ? canonical : NULL;
}

/* --- rules --- */

/* The field at "section/id/key/..."; NULL where there is none. */
static const struct field *field_at(const char *path)
{
    char key[128];
    const struct table *t = NULL;
    const struct field *f = NULL;
    for (int level = 0; *path; level++) {
        size_t n = strcspn(path, "/");
        if (n >= sizeof key)
            return NULL;
        memcpy(key, path, n);
        key[n] = 0;
        path += n + (path[n] == '/');
        if (level == 0) {
            enum kind k = kind_of_section(key);
            if (k == KIND_COUNT)
                return NULL;
            t = kinds[k].table;
        } else if (level > 1 && f && (f->type == FIELD_ROWS || f->type == FIELD_LIST)) {
            f = f->part;
            t = f->type == FIELD_STRUCT ? f->table : NULL;
        } else if (level > 1) {
            f = t ? table_field(t, key) : NULL;
            t = f && f->type == FIELD_STRUCT ? f->table : NULL;
            if (!f)
                return NULL;
        }
    }
    return f;
}

static bool rule_no_is_value(void *ctx, const char *path)
{
    (void)ctx;
    const struct field *f = field_at(path);
    return f && f->type == FIELD_YES;
}

static bool rule_is_set(void *ctx, const char *path)
{
    (void)ctx;
    const struct field *f = field_at(path);
    return f && (f->type == FIELD_REFS || f->type == FIELD_NAMES);
}

/* Parsed again, quietly: the text was checked when the change was bound. */
static struct expr *parse_quietly(struct binding *b, const char *text)
{
    struct diags quiet;
    diags_init(&quiet, b->arena);
    return expr_parse(b->arena, b->units, text, (struct place){.file = "change", .line = 1},
                      &quiet);
}

static bool mentions_was(const char *text)
{
    for (const char *p = text; (p = strstr(p, "was")) != NULL; p += 3) {
        bool before = p == text || p[-1] == ' ' || p[-1] == '(' || p[-1] == '*';
        bool after = p[3] == 0 || p[3] == ' ' || p[3] == ')' || p[3] == '*' || p[3] == '/';
        if (before && after)
            return true;
    }
    return false;
}

static bool rule_uses_was(void *ctx, const struct node *scalar)
{
    if (scalar->form != FORM_TEXT || !mentions_was(scalar->text))
        return false;
    struct expr *e = parse_quietly(ctx, scalar->text);
    return e && expr_uses(e, EXPR_WAS);
}

static struct node *text_of(struct binding *b, const struct expr *e, struct place at)
{
    struct text t;
    text_init(&t, b->arena);
    expr_write(&t, e);
    return node_scalar(b->arena, FORM_TEXT, text_str(&t), at);
}

/* The factor that `e` puts in front of what was, times the factor that was there. */
static struct node *new_times(struct binding *b, const struct expr *e, const struct node *old,
                              struct place at)
{
    bool plain = !old && e->op == EXPR_MULTIPLY && e->args[1]->op == EXPR_WAS;
    if (plain)
        return text_of(b, e->args[0], at);
    struct expr *before = parse_quietly(b, old ? old->text : "1");
    return text_of(b, expr_replace_was(b->arena, e, before), at);
}

/* What a factor makes of a distribution. */
static struct node *scale_distribution(struct binding *b, const struct expr *e,
                                       const struct node *before, struct place at)
{
    struct node *map;
    if (before->type == NODE_MAP) {
        map = node_copy(b->arena, before);
    } else {
        map = node_map(b->arena, at);
        node_add(b->arena, map, "range", before->place, (struct node *)before);
    }
    node_set(b->arena, map, "times", new_times(b, e, node_get(map, "times"), at));
    node_sort(map);
    map->place = at;
    return map;
}

static struct node *rule_combine(void *ctx, const struct node *before, const struct node *patch)
{
    struct binding *b = ctx;
    if (!before || before->type == NODE_LIST) {
        diag_add(b->diags, patch->place, "\"was\" stands where there was nothing before");
        return NULL;
    }
    struct expr *e = parse_quietly(b, patch->text);
    if (before->type == NODE_MAP)
        return scale_distribution(b, e, before, patch->place);
    struct expr *old = parse_quietly(b, before->text);
    if (!old)
        return scale_distribution(b, e, before, patch->place);
    return text_of(b, expr_replace_was(b->arena, e, old), patch->place);
}

struct patch_rules bind_patch_rules(struct binding *b)
{
    return (struct patch_rules){.ctx = b,
                                .uses_was = rule_uses_was,
                                .combine = rule_combine,
                                .no_is_value = rule_no_is_value,
                                .is_set = rule_is_set};
}
