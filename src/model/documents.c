/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sections, ids, `removed` and `like`: all that stands between documents and objects.
 * Owns nothing beyond the arena. */
#include "model/documents.h"

#include "doc/patch.h"
#include "model/bind.h"

/* An object as it is found in the documents or in the register. */
struct entry {
    enum kind kind;
    const char *id;
    struct place place; /* of the id; line 0 for a stored one */
    const struct node *node;
    bool removed, resolved;
};

struct merging {
    struct arena *arena;
    struct diags *diags;
    struct strmap entries; /* id -> struct entry, from the documents */
    struct strmap stored;  /* id -> struct entry */
    struct units units;
    struct binding binding;
    struct patch_rules rules;
};

static void unknown_section(struct merging *m, const struct pair *p)
{
    struct nearest near;
    nearest_init(&near, p->key);
    nearest_offer(&near, "removed");
    for (int k = 0; k < KIND_COUNT; k++)
        nearest_offer(&near, kinds[k].section);
    diag_add(m->diags, p->place, "there is no section \"%s\"%s", p->key,
             nearest_hint(m->arena, &near));
}

static bool new_entry(struct merging *m, enum kind kind, const char *id, struct place at,
                      struct entry **out)
{
    const struct entry *first = strmap_get(&m->entries, id);
    if (first) {
        diag_add(m->diags, at, "\"%s\" stands twice; the first is at %s:%u:%u", id,
                 first->place.file, first->place.line, first->place.column);
        return false;
    }
    const struct entry *stored = strmap_get(&m->stored, id);
    if (stored && stored->kind != kind && kind != KIND_COUNT) {
        diag_add(m->diags, at, "\"%s\" is %s in the register; ids are unique over all kinds", id,
                 kinds_words(m->arena, KIND_BIT(stored->kind)));
        return false;
    }
    struct entry *e = NEW(m->arena, struct entry);
    *e = (struct entry){.kind = kind, .id = id, .place = at};
    strmap_set(m->arena, &m->entries, id, e);
    *out = e;
    return true;
}

static void add_section(struct merging *m, enum kind kind, const struct node *section)
{
    if (section->type != NODE_MAP) {
        if (section->type == NODE_SCALAR && !*section->text && !section->quoted)
            return; /* an empty section */
        diag_add(m->diags, section->place, "the section \"%s\" is a map of ids",
                 kinds[kind].section);
        return;
    }
    for (size_t i = 0; i < section->n; i++) {
        const struct pair *p = &section->pairs[i];
        struct entry *e;
        if (!name_is_valid(&m->units, p->key))
            diag_add(m->diags, p->place, "\"%s\" cannot be an id: %s", p->key,
                     name_objection(&m->units, p->key));
        else if (text_equal(p->key, REGISTER_ID))
            diag_add(m->diags, p->place, "\"%s\" is the id of the settings", REGISTER_ID);
        else if (new_entry(m, kind, p->key, p->place, &e))
            e->node = p->value;
    }
}

static void add_settings(struct merging *m, const struct pair *p)
{
    struct entry *e;
    if (p->value->type != NODE_MAP)
        diag_add(m->diags, p->value->place, "the section \"register\" is a map of settings");
    else if (new_entry(m, KIND_REGISTER, REGISTER_ID, p->place, &e))
        e->node = p->value;
}

static void add_removed(struct merging *m, const struct node *list)
{
    if (list->type != NODE_LIST) {
        diag_add(m->diags, list->place, "\"removed\" is a list of ids in square brackets");
        return;
    }
    for (size_t i = 0; i < list->n; i++) {
        const struct node *item = list->items[i];
        struct entry *e;
        if (item->type != NODE_SCALAR || !strmap_has(&m->stored, item->text) ||
            text_equal(item->text, REGISTER_ID))
            diag_add(m->diags, item->place, "there is no \"%s\" in the register to remove",
                     item->type == NODE_SCALAR ? item->text : "list");
        else if (new_entry(m, KIND_COUNT, item->text, item->place, &e))
            e->removed = true;
    }
}

static void add_document(struct merging *m, const struct node *root)
{
    for (size_t i = 0; i < root->n; i++) {
        const struct pair *p = &root->pairs[i];
        enum kind kind = kind_of_section(p->key);
        if (text_equal(p->key, "removed"))
            add_removed(m, p->value);
        else if (kind == KIND_REGISTER)
            add_settings(m, p);
        else if (kind != KIND_COUNT)
            add_section(m, kind, p->value);
        else
            unknown_section(m, p);
    }
}

/* --- like --- */

static bool is_structure_key(const char *key)
{
    return text_equal(key, "all") || text_equal(key, "any") || text_equal(key, "at-least") ||
           text_equal(key, "of") || text_equal(key, "works");
}

static bool has_structure(const struct node *map)
{
    bool has = false;
    for (size_t i = 0; i < map->n; i++)
        has = has || is_structure_key(map->pairs[i].key);
    return has;
}

/* The map without `like`, and without a structure where `without_structure`. */
static struct node *stripped(struct merging *m, const struct node *map, bool without_structure)
{
    struct node *out = node_map(m->arena, map->place);
    for (size_t i = 0; i < map->n; i++) {
        const struct pair *p = &map->pairs[i];
        if (text_equal(p->key, "like") || (without_structure && is_structure_key(p->key)))
            continue;
        node_add(m->arena, out, p->key, p->place, p->value);
    }
    return out;
}

/* In what follows `like`, an unquoted `no` removes, as it does in a change; in a
 * yes-or-no field it is the value. Text becomes FORM_NO, which patch_apply knows. */
static const struct node *with_removals(struct merging *m, const struct node *node,
                                        const char *path)
{
    if (node->type == NODE_SCALAR) {
        bool no = node->form == FORM_TEXT && !node->quoted && text_equal(node->text, "no");
        return no && !m->rules.no_is_value(m->rules.ctx, path)
                   ? node_scalar(m->arena, FORM_NO, "no", node->place)
                   : node;
    }
    if (node->type == NODE_LIST)
        return node;
    struct node *out = node_map(m->arena, node->place);
    for (size_t i = 0; i < node->n; i++) {
        const struct pair *p = &node->pairs[i];
        const char *below = arena_printf(m->arena, "%s/%s", path, p->key);
        node_add(m->arena, out, p->key, p->place, (struct node *)with_removals(m, p->value, below));
    }
    return out;
}

static const struct node *resolve(struct merging *m, struct entry *e, unsigned depth);

/* The object that `like` names, in the documents first. */
static const struct node *original(struct merging *m, const struct entry *e,
                                   const struct node *like, unsigned depth)
{
    if (like->type != NODE_SCALAR) {
        diag_add(m->diags, like->place, "\"like\" names one object");
        return NULL;
    }
    bool itself = text_equal(like->text, e->id); /* as it is stored: only some fields change */
    struct entry *from = itself ? NULL : strmap_get(&m->entries, like->text);
    if (!from || from->removed)
        from = strmap_get(&m->stored, like->text);
    if (itself && !from) {
        diag_add(m->diags, like->place,
                 "\"%s\" is not in the register yet: only what is stored can be like itself",
                 e->id);
        return NULL;
    }
    if (!from || from->kind != e->kind) {
        struct nearest near;
        nearest_init(&near, like->text);
        for (size_t i = 0; i < m->entries.n; i++)
            if (((struct entry *)m->entries.at[i].value)->kind == e->kind)
                nearest_offer(&near, m->entries.at[i].key);
        diag_add(m->diags, like->place, "there is no %s \"%s\" to start from%s",
                 kinds[e->kind].name, like->text, nearest_hint(m->arena, &near));
        return NULL;
    }
    if (depth == LIKE_DEPTH) {
        diag_add(m->diags, like->place,
                 "\"like\" leads in a circle, or through more than %d objects", LIKE_DEPTH);
        return NULL;
    }
    return resolve(m, from, depth + 1);
}

static const struct node *resolve(struct merging *m, struct entry *e, unsigned depth)
{
    const struct node *like = e->node->type == NODE_MAP ? node_get(e->node, "like") : NULL;
    if (!like || e->resolved)
        return e->node;
    const struct node *from = original(m, e, like, depth);
    if (!from)
        return NULL;
    if (from->type != NODE_MAP) {
        diag_add(m->diags, like->place, "\"%s\" is written in one word; write this one out too",
                 like->text);
        return NULL;
    }
    const char *path = arena_printf(m->arena, "%s/%s", kinds[e->kind].section, e->id);
    struct node *base = stripped(m, from, has_structure(e->node));
    const struct node *overrides = with_removals(m, stripped(m, e->node, false), path);
    struct node *merged = patch_apply(m->arena, &m->rules, base, overrides, path);
    if (!merged)
        return NULL;
    merged->place = e->node->place;
    e->node = merged;
    e->resolved = true;
    return merged;
}

/* --- the whole --- */

static void remember_stored(struct merging *m, const struct model_sources *stored)
{
    for (size_t i = 0; i < stored->n; i++) {
        struct entry *e = NEW(m->arena, struct entry);
        *e = (struct entry){
            .kind = stored->at[i].kind, .id = stored->at[i].id, .node = stored->at[i].node};
        strmap_set(m->arena, &m->stored, e->id, e);
    }
}

/* Units decide which words are reserved: those of the settings in the documents, else
 * of the stored ones. */
static void find_units(struct merging *m, size_t n, const struct node *const *roots)
{
    const struct node *settings = NULL;
    for (size_t i = 0; i < n && !settings; i++)
        settings = node_get(roots[i], kinds[KIND_REGISTER].section);
    const struct entry *stored = strmap_get(&m->stored, REGISTER_ID);
    if (!settings && stored)
        settings = stored->node;
    m->units = model_units(m->arena, settings);
    m->binding = (struct binding){.arena = m->arena, .units = &m->units, .diags = m->diags};
    m->rules = bind_patch_rules(&m->binding);
}

static void check_alone(struct merging *m, const struct entry *e)
{
    struct units standard = {.currency = m->units.currency};
    struct binding b = m->binding;
    struct node *canonical;
    void *data;
    if (e->removed || (e->node->type == NODE_MAP && node_get(e->node, "like")))
        return;
    if (e->kind == KIND_REGISTER)
        b.units = &standard;
    bind_object(&b, kinds[e->kind].table, e->node, &canonical, &data);
}

void documents_check_alone(struct arena *a, const struct model_sources *stored, size_t n,
                           const struct node *const *roots, struct diags *d)
{
    struct merging m = {.arena = a, .diags = d};
    bool settings = false;
    remember_stored(&m, stored);
    find_units(&m, n, roots);
    for (size_t i = 0; i < n; i++)
        settings = settings || node_get(roots[i], kinds[KIND_REGISTER].section);
    if (!settings && !strmap_has(&m.stored, REGISTER_ID))
        return;
    for (size_t i = 0; i < n; i++)
        add_document(&m, roots[i]);
    for (size_t i = 0; i < m.entries.n; i++)
        check_alone(&m, m.entries.at[i].value);
}

bool documents_merge(struct arena *a, const struct model_sources *stored, size_t n,
                     const struct node *const *roots, struct model_sources *out, struct diags *d)
{
    struct merging m = {.arena = a, .diags = d};
    size_t errors = d->count;
    struct model_sources all = {0};
    remember_stored(&m, stored);
    find_units(&m, n, roots);
    for (size_t i = 0; i < n; i++)
        add_document(&m, roots[i]);
    for (size_t i = 0; i < m.entries.n; i++) {
        struct entry *e = m.entries.at[i].value;
        const struct node *node = e->removed ? NULL : resolve(&m, e, 0);
        if (node)
            *array_push(a, &all) = (struct model_source){e->kind, e->id, node};
    }
    for (size_t i = 0; i < stored->n; i++)
        if (!strmap_has(&m.entries, stored->at[i].id))
            *array_push(a, &all) = stored->at[i];
    if (d->count != errors)
        return false;
    *out = all;
    return true;
}
