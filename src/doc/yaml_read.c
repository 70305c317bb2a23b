/* SPDX-License-Identifier: GPL-3.0-or-later */
/* YAML into trees: the only file that sees libyaml, whose events are streamed.
 *
 * Owns, in a child arena, the parser and the event in hand (released by a
 * deferred call, so that a jump does not leak them), the stack of open maps and
 * lists, and the sets of keys. Invariant: frames[0 .. depth) are the open ones,
 * outermost first; a key waits in a map's frame until its value is complete.
 * libyaml's lack of memory becomes the arena's. */
#include "doc/yaml.h"

#include <string.h>
#include <yaml.h>

#include "base/utf8.h"
#include "doc/yaml_slip.h"

/* From this many keys on, a set finds duplicates; below, a walk does. */
enum { FEW_KEYS = 8 };

struct frame {
    struct node *node;
    bool orphan;             /* it stands where a key belongs: kept nowhere */
    bool flow;               /* in brackets */
    bool has_key;            /* a key was read, its value comes next */
    const char *key;         /* NULL: a key that was refused; its value is dropped */
    struct place key_place;
    bool key_plain;
    struct spot key_end;
    const char *plain;       /* the last value when it was a plain scalar, or NULL */
    struct strmap keys;      /* of maps with many keys: to their struct place */
};

struct reader {
    struct arena *a, *scratch;
    struct diags *d;
    struct source source;
    yaml_parser_t parser;
    yaml_event_t event;
    struct frame frames[YAML_DEPTH];
    size_t depth, nodes;
    struct node *root;
    bool failed, stopped;
};

static void release(void *object)
{
    struct reader *r = object;
    yaml_event_delete(&r->event);
    yaml_parser_delete(&r->parser);
}

static struct spot spot_of(yaml_mark_t mark)
{
    return (struct spot){mark.line, mark.column};
}

static struct place here(const struct reader *r)
{
    return source_place(&r->source, spot_of(r->event.start_mark));
}

#define REFUSE(r, at, ...) ((r)->failed = true, diag_add((r)->d, (at), __VA_ARGS__))

static struct frame *top(struct reader *r)
{
    return r->depth ? &r->frames[r->depth - 1] : NULL;
}

/* Does a key come next? */
static bool wants_key(const struct frame *f)
{
    return f && f->node->type == NODE_MAP && !f->has_key;
}

static struct place *first_of_key(struct reader *r, struct frame *f, const char *key)
{
    struct node *map = f->node;
    if (map->n >= FEW_KEYS)
        return strmap_get(&f->keys, key);
    for (size_t i = 0; i < map->n; i++)
        if (text_equal(map->pairs[i].key, key))
            return arena_copy(r->scratch, &map->pairs[i].place, sizeof(struct place));
    return NULL;
}

static void remember_key(struct reader *r, struct frame *f, size_t i)
{
    const struct pair *p = &f->node->pairs[i];
    strmap_set(r->scratch, &f->keys, p->key,
               arena_copy(r->scratch, &p->place, sizeof p->place));
}

static void add_pair(struct reader *r, struct frame *f, struct node *value)
{
    node_add(r->a, f->node, f->key, f->key_place, value);
    size_t n = f->node->n;
    for (size_t i = n == FEW_KEYS ? 0 : n - 1; n >= FEW_KEYS && i < n; i++)
        remember_key(r, f, i);
}

/* Puts a complete value where it belongs. */
static void attach(struct reader *r, struct node *value)
{
    struct frame *f = top(r);
    if (!f) {
        r->root = value;
    } else if (f->node->type == NODE_LIST) {
        node_push(r->a, f->node, value);
    } else {
        if (f->key)
            add_pair(r, f, value);
        f->has_key = false;
    }
}

/* One node more; false when the file has too many. */
static bool count_node(struct reader *r)
{
    if (++r->nodes <= YAML_NODES)
        return true;
    REFUSE(r, here(r), "the file holds more than %d values: split it", YAML_NODES);
    r->stopped = true;
    return false;
}

/* Tags and anchors of a node are refused, and the reading goes on. */
static void refuse_marks(struct reader *r, const yaml_char_t *tag, const yaml_char_t *anchor)
{
    if (tag)
        REFUSE(r, here(r),
               "tags (words that begin with !) are not used here: leave it out, or quote a value "
               "that begins with !");
    if (anchor)
        REFUSE(r, here(r),
               "anchors (words that begin with &) are not used here: use 'like:' to start from "
               "another object, or quote a value that begins with &");
}

/* ---- scalars ---- */

static bool holds_control(const char *s, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (source_control(s + i, n - i) > 0)
            return true;
    return false;
}

/* The text of the scalar in hand, in NFC; NULL when it was refused. */
static const char *scalar_text(struct reader *r, size_t limit, const char *what)
{
    const char *bytes = (const char *)r->event.data.scalar.value;
    size_t n = r->event.data.scalar.length;
    if (holds_control(bytes, n)) {
        REFUSE(r, here(r), "a %s must not hold control characters, not even by an escape", what);
        return NULL;
    }
    const char *text = utf8_nfc(r->a, arena_strn(r->a, bytes, n));
    if (strlen(text) > limit) {
        REFUSE(r, here(r), "a %s may have at most %zu bytes, this one has %zu", what, limit,
               strlen(text));
        return NULL;
    }
    return text;
}

static bool is_plain(const struct reader *r)
{
    return r->event.data.scalar.style == YAML_PLAIN_SCALAR_STYLE;
}

/* The key in hand, or NULL when it was refused. */
static const char *checked_key(struct reader *r, struct frame *f)
{
    const char *key = scalar_text(r, YAML_KEY_BYTES, "key");
    if (!key)
        return NULL;
    if (is_plain(r) && text_equal(key, "<<")) {
        REFUSE(r, here(r), "'<<' is not used here: use 'like:' to start from another object");
        return NULL;
    }
    if (is_plain(r) && !*key) {
        REFUSE(r, here(r), "a key is missing before the colon");
        return NULL;
    }
    const struct place *first = first_of_key(r, f, key);
    if (first) {
        REFUSE(r, here(r), "the key %s stands twice: first in line %u, column %u",
               source_quote(r->scratch, key), first->line, first->column);
        return NULL;
    }
    return key;
}

static void take_key(struct reader *r, struct frame *f)
{
    f->key = checked_key(r, f);
    f->key_place = here(r);
    f->key_plain = is_plain(r);
    f->key_end = spot_of(r->event.end_mark);
    f->has_key = true;
}

/* In brackets, an empty value with no colon since its key is no value at all. */
static bool lacks_value(struct reader *r, const struct frame *f)
{
    if (!f || !f->flow || f->node->type != NODE_MAP || !is_plain(r) ||
        r->event.data.scalar.length > 0 || !f->key)
        return false;
    size_t from = source_offset(&r->source, f->key_end);
    size_t to = source_offset(&r->source, spot_of(r->event.start_mark));
    return from >= to || !memchr(r->source.text + from, ':', to - from);
}

static void refuse_lone_key(struct reader *r, const struct frame *f)
{
    const char *key = source_quote(r->scratch, f->key);
    if (f->key_plain && slip_lacks_blank(f->key)) {
        r->failed = true;
        slip_report_blank(r->scratch, r->d, f->key_place, f->key);
    } else if (f->plain) {
        REFUSE(r, f->key_place,
               "%s has no value: inside { } a comma ends the value %s before it; part arguments "
               "with ';', write numbers without thousands commas, or quote the value",
               key, source_quote(r->scratch, f->plain));
    } else {
        REFUSE(r, f->key_place, "%s has no value: inside { } write 'key: value'", key);
    }
}

static int open_parentheses(const char *s)
{
    int open = 0;
    for (; *s; s++)
        open += (*s == '(') - (*s == ')');
    return open;
}

/* [max(1, 2)] is a list of two texts: the slip shows in the parentheses. */
static void check_item(struct reader *r, const struct frame *f, const char *text)
{
    if (!f->flow || !f->plain || open_parentheses(f->plain) <= 0 || open_parentheses(text) >= 0)
        return;
    REFUSE(r, here(r), "inside [ ] a comma ends the item %s: part arguments with ';', or quote it",
           source_quote(r->scratch, f->plain));
}

/* Plain values that show a slip although YAML takes them. */
static void check_plain(struct reader *r, const struct frame *f, const char *text)
{
    bool below = !f || f->node->type == NODE_LIST ||
                 (!f->flow && here(r).line > f->key_place.line);
    if (below && slip_lacks_blank(text)) {
        r->failed = true;
        slip_report_blank(r->scratch, r->d, here(r), text);
    } else if (f && f->node->type == NODE_LIST) {
        check_item(r, f, text);
    }
}

static void take_value(struct reader *r, struct frame *f)
{
    const char *text = scalar_text(r, YAML_SCALAR_BYTES, "value");
    if (!count_node(r))
        return;
    if (lacks_value(r, f))
        refuse_lone_key(r, f);
    else if (text && is_plain(r))
        check_plain(r, f, text);
    if (f)
        f->plain = text && *text && is_plain(r) ? text : NULL;
    struct node *n = node_scalar(r->a, FORM_TEXT, text ? text : "", here(r));
    n->quoted = !is_plain(r);
    n->place.whole = r->event.start_mark.line != r->event.end_mark.line;
    attach(r, n);
}

static void take_scalar(struct reader *r)
{
    struct frame *f = top(r);
    refuse_marks(r, r->event.data.scalar.tag, r->event.data.scalar.anchor);
    if (wants_key(f))
        take_key(r, f);
    else
        take_value(r, f);
}

/* ---- maps and lists ---- */

static void open_frame(struct reader *r, struct node *n, bool flow)
{
    bool orphan = wants_key(top(r));
    if (orphan)
        REFUSE(r, here(r), "a key must be a single text, not a %s",
               n->type == NODE_MAP ? "map: quote a text that begins with {" :
                                     "list: quote a text that begins with [");
    if (r->depth == YAML_DEPTH) {
        REFUSE(r, here(r), "the text is nested deeper than %d levels", YAML_DEPTH);
        r->stopped = true;
        return;
    }
    r->frames[r->depth++] = (struct frame){.node = n, .orphan = orphan, .flow = flow};
}

static void close_frame(struct reader *r)
{
    struct frame closed = r->frames[--r->depth];
    struct frame *f = top(r);
    if (f)
        f->plain = NULL;
    if (!closed.orphan) {
        attach(r, closed.node);
        return;
    }
    f->key = NULL;
    f->has_key = true;
}

static void open_map(struct reader *r)
{
    refuse_marks(r, r->event.data.mapping_start.tag, r->event.data.mapping_start.anchor);
    bool flow = r->event.data.mapping_start.style == YAML_FLOW_MAPPING_STYLE;
    if (count_node(r))
        open_frame(r, node_map(r->a, here(r)), flow);
}

static void open_list(struct reader *r)
{
    refuse_marks(r, r->event.data.sequence_start.tag, r->event.data.sequence_start.anchor);
    bool flow = r->event.data.sequence_start.style == YAML_FLOW_SEQUENCE_STYLE;
    if (count_node(r))
        open_frame(r, node_list(r->a, here(r)), flow);
}

static void take_alias(struct reader *r)
{
    struct frame *f = top(r);
    REFUSE(r, here(r),
           "aliases (words that begin with *) are not used here: use 'like:' to start from another "
           "object, or quote a value that begins with *");
    if (!wants_key(f)) {
        attach(r, node_scalar(r->a, FORM_TEXT, "", here(r)));
        return;
    }
    f->key = NULL;
    f->has_key = true;
}

/* ---- the document ---- */

static void start_document(struct reader *r)
{
    if (r->root) {
        REFUSE(r, here(r), "a second document begins here: a file holds one, remove the '---'");
        r->stopped = true;
    } else if (r->event.data.document_start.tag_directives.start !=
               r->event.data.document_start.tag_directives.end) {
        REFUSE(r, here(r), "%%TAG lines are not used here: leave it out");
    }
}

static void take_event(struct reader *r)
{
    switch (r->event.type) {
    case YAML_DOCUMENT_START_EVENT:
        start_document(r);
        break;
    case YAML_SCALAR_EVENT:
        take_scalar(r);
        break;
    case YAML_MAPPING_START_EVENT:
        open_map(r);
        break;
    case YAML_SEQUENCE_START_EVENT:
        open_list(r);
        break;
    case YAML_MAPPING_END_EVENT:
    case YAML_SEQUENCE_END_EVENT:
        close_frame(r);
        break;
    case YAML_ALIAS_EVENT:
        take_alias(r);
        break;
    case YAML_STREAM_END_EVENT:
        r->stopped = true;
        break;
    default:
        break;
    }
}

static void report_slip(struct reader *r)
{
    yaml_parser_t *p = &r->parser;
    if (p->error == YAML_MEMORY_ERROR)
        arena_exhausted(r->a);
    yaml_mark_t opened = p->context ? p->context_mark : p->problem_mark;
    struct slip slip = {.problem = p->problem ? p->problem : "unknown",
                        .opened = source_clamp(&r->source, spot_of(opened)),
                        .at = source_clamp(&r->source, spot_of(p->problem_mark))};
    r->failed = true;
    r->stopped = true;
    slip_report(r->scratch, &r->source, &slip, r->d);
}

static void read_events(struct reader *r)
{
    arena_defer(r->scratch, release, r);
    if (!yaml_parser_initialize(&r->parser))
        arena_exhausted(r->a);
    yaml_parser_set_encoding(&r->parser, YAML_UTF8_ENCODING);
    yaml_parser_set_input_string(&r->parser, (const unsigned char *)r->source.text, r->source.n);
    while (!r->stopped) {
        if (yaml_parser_parse(&r->parser, &r->event)) {
            take_event(r);
            yaml_event_delete(&r->event);
        } else {
            report_slip(r);
        }
    }
}

/* The root as a map: nothing at all is an empty one. */
static struct node *root_map(struct reader *r)
{
    struct node *root = r->root;
    if (!root)
        return node_map(r->a, source_place(&r->source, (struct spot){0, 0}));
    if (root->type == NODE_MAP)
        return root;
    if (root->type == NODE_SCALAR && !root->quoted && !*root->text)
        return node_map(r->a, root->place);
    REFUSE(r, root->place, "the document must be a map, lines of 'key: value', but this is a %s",
           root->type == NODE_LIST ? "list" : "single text");
    return root;
}

struct node *yaml_read(struct arena *a, const char *name, const char *text, size_t n,
                       struct diags *d)
{
    struct arena *scratch = arena_child(a);
    struct reader *r = NEW(scratch, struct reader);
    struct node *root = NULL;
    r->a = a;
    r->scratch = scratch;
    r->d = d;
    if (source_open(&r->source, name, text, n, YAML_BYTES, d)) {
        read_events(r);
        if (!r->failed)
            root = root_map(r);
        if (r->failed)
            root = NULL;
    }
    arena_free(scratch);
    return root;
}
