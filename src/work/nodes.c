/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What objects say, for people: nodes as text in one line, objects in document form. */
#include <string.h>

#include "base/utf8.h"
#include "model/bind.h"
#include "work/work.h"

/* The keys of quantities that are said before the others. */
static const char *const first_keys[] = {"shape", "prior", "range", "median", "mean", "is"};

static int key_rank(const char *key)
{
    int n = (int)(sizeof first_keys / sizeof *first_keys);
    for (int i = 0; i < n; i++)
        if (text_equal(key, first_keys[i]))
            return i;
    return n;
}

/* The pairs of a map by rank, else as they are. */
static size_t *reading_order(struct arena *a, const struct node *map)
{
    size_t *order = NEW_ARRAY(a, map->n, size_t);
    for (size_t i = 0; i < map->n; i++) {
        size_t k = i;
        int rank = key_rank(map->pairs[i].key);
        for (; k > 0 && key_rank(map->pairs[order[k - 1]].key) > rank; k--)
            order[k] = order[k - 1];
        order[k] = i;
    }
    return order;
}

static void write_brief(struct text *t, const struct node *n, bool inside)
{
    if (n->type == NODE_SCALAR) {
        text_add(t, n->text);
        return;
    }
    bool map = n->type == NODE_MAP;
    const size_t *order = map ? reading_order(t->arena, n) : NULL;
    if (inside)
        text_byte(t, map ? '{' : '[');
    for (size_t i = 0; i < n->n; i++) {
        text_add(t, i ? ", " : "");
        if (map)
            text_printf(t, "%s: ", n->pairs[order[i]].key);
        write_brief(t, map ? n->pairs[order[i]].value : n->items[i], true);
    }
    if (inside)
        text_byte(t, map ? '}' : ']');
}

const char *brief(struct arena *a, const char *text, size_t most)
{
    if (utf8_columns(text) <= most)
        return text;
    return arena_printf(a, "%.*s...", (int)utf8_prefix(text, most - 3), text);
}

const char *node_says(struct arena *a, const struct node *n, size_t most)
{
    struct text t;
    text_init(&t, a);
    write_brief(&t, n, false);
    if (n->type != NODE_SCALAR && n->n == 0)
        text_add(&t, "none");
    return brief(a, text_str(&t), most);
}

/* Is the document form of the node a short form: no map of the table's own keys? */
static bool is_short(const struct table *t, const struct node *doc)
{
    if (doc->type != NODE_MAP)
        return true;
    for (size_t i = 0; i < doc->n; i++)
        if (!table_field(t, doc->pairs[i].key))
            return true;
    return false;
}

/* Short forms are written out; the fields stand in the order of their table. */
const struct node *object_document(struct arena *a, const struct object *o)
{
    const struct table *t = kinds[o->kind].table;
    struct node *doc = bind_document(a, t, o->node), *out = node_map(a, o->node->place);
    if (t->short_key && is_short(t, doc)) {
        node_add(a, out, t->short_key, doc->place, doc);
        return out;
    }
    for (size_t i = 0; i < t->n_fields; i++) {
        struct node *value = node_get(doc, t->fields[i].key);
        if (value)
            node_add(a, out, t->fields[i].key, value->place, value);
    }
    return out;
}

const char *kind_title(struct arena *a, enum kind kind)
{
    char *s = arena_str(a, kinds[kind].table->name);
    *s = (char)(*s - 'a' + 'A');
    return s;
}

const char *count_words(struct arena *a, uint64_t n, const char *one, const char *many)
{
    return arena_printf(a, "%llu %s", (unsigned long long)n, n == 1 ? one : many);
}
