/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Binding of single values that are no quantities, and of sets of names. */
#include "model/binder.h"

#include <stdlib.h>
#include <string.h>

#define LARGEST_COUNT INT64_C(9007199254740991) /* 2^53 - 1: canonical JSON holds it exactly */

/* Stays quoted where it was: in a change the text "no" is not the removal `no`. */
static struct node *text_node(struct binding *b, const struct node *node)
{
    struct node *text = node_scalar(b->arena, FORM_TEXT, node->text, node->place);
    text->quoted = node->quoted;
    return text;
}

static bool is_name(struct binding *b, const struct node *node)
{
    if (name_is_valid(b->units, node->text))
        return true;
    diag_add(b->diags, node->place, "\"%s\" cannot be a name: %s", node->text,
             name_objection(b->units, node->text));
    return false;
}

/* Outcomes may be `none`, a currency is its unit. */
static struct node *bind_name(struct binding *b, const struct field *f, const struct node *node,
                              void *member)
{
    bool none = f->key && text_equal(f->key, "outcome") && text_equal(node->text, "none");
    bool currency = f->key && text_equal(f->key, "currency");
    bool all = f->key && text_equal(f->key, "perspective") && text_equal(node->text, "all");
    if (!none && !currency && !all && !is_name(b, node))
        return NULL;
    if (currency &&
        (strlen(node->text) != 3 || strspn(node->text, "ABCDEFGHIJKLMNOPQRSTUVWXYZ") != 3)) {
        diag_add(b->diags, node->place,
                 "\"%s\" is no currency code: ISO 4217 has three capital letters, such as EUR",
                 node->text);
        return NULL;
    }
    if (member)
        *(const char **)member = node->text;
    return text_node(b, node);
}

static struct node *bind_word(struct binding *b, const struct field *f, const struct node *node,
                              void *member)
{
    struct nearest near;
    struct text words;
    nearest_init(&near, node->text);
    text_init(&words, b->arena);
    for (int i = 0; f->words[i]; i++) {
        if (text_equal(f->words[i], node->text)) {
            if (member)
                *(int *)member = i;
            return text_node(b, node);
        }
        nearest_offer(&near, f->words[i]);
        text_printf(&words, "%s%s", i ? ", " : "", f->words[i]);
    }
    diag_add(b->diags, node->place, "\"%s\" is none of %s%s", node->text, text_str(&words),
             nearest_hint(b->arena, &near));
    return NULL;
}

static struct node *bind_yes(struct binding *b, const struct node *node, void *member)
{
    bool yes = node->form == FORM_YES || text_equal(node->text, "yes");
    bool no = node->form == FORM_NO || text_equal(node->text, "no");
    if (!yes && !no) {
        diag_add(b->diags, node->place, "expected yes or no, found \"%s\"", node->text);
        return NULL;
    }
    if (member)
        *(bool *)member = yes;
    return node_scalar(b->arena, yes ? FORM_YES : FORM_NO, yes ? "yes" : "no", node->place);
}

static struct node *bind_count(struct binding *b, const struct field *f, const struct node *node,
                               void *member)
{
    size_t n = strlen(node->text);
    bool digits = n >= 1 && n <= 16 && strspn(node->text, "0123456789") == n;
    int64_t value = digits ? strtoll(node->text, NULL, 10) : -1;
    int64_t high = f->high ? f->high : LARGEST_COUNT;
    if (!digits || value < f->low || value > high || value > LARGEST_COUNT) {
        diag_add(b->diags, node->place, "expected a whole number from %lld to %lld, found \"%s\"",
                 (long long)f->low, (long long)high, node->text);
        return NULL;
    }
    if (member)
        *(int64_t *)member = value;
    return node_scalar(b->arena, FORM_COUNT, arena_printf(b->arena, "%lld", (long long)value),
                       node->place);
}

static struct node *bind_date(struct binding *b, const struct node *node, void *member)
{
    day d;
    if (!date_read(node->text, &d)) {
        diag_add(b->diags, node->place,
                 "\"%s\" is no date: a date is written as 2027-06-30, year, month, day",
                 node->text);
        return NULL;
    }
    if (member)
        *(day *)member = d;
    return text_node(b, node);
}

static struct node *bind_when(struct binding *b, const struct node *node, void *member)
{
    bool year = strlen(node->text) == 4 && strspn(node->text, "0123456789") == 4;
    day d;
    if (year)
        d = date_of(atoi(node->text), 1, 1);
    else if (!date_read(node->text, &d)) {
        diag_add(b->diags, node->place,
                 "\"%s\" is neither a year such as 2027 nor a date such as 2027-06-30", node->text);
        return NULL;
    }
    if (member)
        *(day *)member = d;
    return text_node(b, node);
}

/* "section a" is read as the literal "1 section a". */
static struct node *bind_unit(struct binding *b, const struct node *node, void *member)
{
    struct place at = node->place;
    at.column = at.column > 2 ? at.column - 2 : 1;
    const char *literal = arena_printf(b->arena, "1 %s", node->text);
    struct expr *e = expr_parse(b->arena, b->units, literal, at, b->diags);
    if (!e)
        return NULL;
    if (e->op != EXPR_LITERAL || strlen(e->text) < 3) {
        diag_add(b->diags, node->place, "expected units such as section a, found \"%s\"",
                 node->text);
        return NULL;
    }
    const char *text = e->text + 2;
    if (member)
        *(const char **)member = text;
    return node_scalar(b->arena, FORM_TEXT, text, node->place);
}

static struct node *bind_text(struct binding *b, const struct node *node, void *member)
{
    if (!*node->text) {
        diag_add(b->diags, node->place, "expected a text, found nothing");
        return NULL;
    }
    if (member)
        *(const char **)member = node->text;
    return text_node(b, node);
}

struct node *bind_scalar(struct binding *b, const struct field *f, const struct node *node,
                         void *member)
{
    if (node->type != NODE_SCALAR) {
        diag_add(b->diags, node->place, "expected a single value%s%s%s, found %s",
                 f->key ? " for \"" : "", f->key ? f->key : "", f->key ? "\"" : "",
                 bind_node_words(node));
        return NULL;
    }
    switch (f->type) {
    case FIELD_NAME: return bind_name(b, f, node, member);
    case FIELD_REF:
        if (!is_name(b, node))
            return NULL;
        if (member)
            *(const char **)member = node->text;
        return text_node(b, node);
    case FIELD_WORD: return bind_word(b, f, node, member);
    case FIELD_YES: return bind_yes(b, node, member);
    case FIELD_COUNT: return bind_count(b, f, node, member);
    case FIELD_DATE: return bind_date(b, node, member);
    case FIELD_WHEN: return bind_when(b, node, member);
    case FIELD_UNIT: return bind_unit(b, node, member);
    default: return bind_text(b, node, member);
    }
}

/* --- sets of names --- */

static int by_text(const void *p, const void *q)
{
    const struct node *const *a = p, *const *b = q;
    return text_compare((*a)->text, (*b)->text);
}

/* A list of names; sets are sorted and must not repeat. */
static struct node *bind_names(struct binding *b, const struct field *f, const struct node *node,
                               struct names *names)
{
    bool fine = true, set = f->type != FIELD_ORDERED;
    struct node *canonical = node_list(b->arena, node->place);
    for (size_t i = 0; i < node->n; i++) {
        const struct node *item = node->items[i];
        if (item->type != NODE_SCALAR) {
            diag_add(b->diags, item->place, "expected a name, found %s", bind_node_words(item));
            fine = false;
        } else if (is_name(b, item)) {
            node_push(b->arena, canonical, text_node(b, item));
        } else {
            fine = false;
        }
    }
    if (set && canonical->n > 1)
        qsort(canonical->items, canonical->n, sizeof *canonical->items, by_text);
    for (size_t i = 1; set && i < canonical->n; i++) {
        if (!text_equal(canonical->items[i]->text, canonical->items[i - 1]->text))
            continue;
        diag_add(b->diags, canonical->items[i]->place, "\"%s\" stands twice in this list",
                 canonical->items[i]->text);
        fine = false;
    }
    if (names) {
        names->n = canonical->n;
        names->at = NEW_ARRAY(b->arena, canonical->n, const char *);
        for (size_t i = 0; i < canonical->n; i++)
            names->at[i] = canonical->items[i]->text;
    }
    return fine ? canonical : NULL;
}

/* Inside a change: names with yes (added) or no (taken away). */
static struct node *bind_additions(struct binding *b, const struct node *node)
{
    bool fine = true;
    struct node *canonical = node_map(b->arena, node->place);
    for (size_t i = 0; i < node->n; i++) {
        const struct pair *p = &node->pairs[i];
        if (p->value->type != NODE_SCALAR) {
            diag_add(b->diags, p->value->place, "expected yes or no behind \"%s\"", p->key);
            fine = false;
            continue;
        }
        struct node *value = bind_yes(b, p->value, NULL);
        fine = fine && value;
        if (value)
            node_add(b->arena, canonical, p->key, p->place, value);
    }
    node_sort(canonical);
    return fine ? canonical : NULL;
}

struct node *bind_set(struct binding *b, const struct field *f, const struct node *node,
                      void *member)
{
    if (node->type == NODE_LIST)
        return bind_names(b, f, node, member);
    if (b->change && node->type == NODE_MAP && f->type != FIELD_ORDERED)
        return bind_additions(b, node);
    diag_add(b->diags, node->place, "expected a list of names in square brackets, found %s",
             bind_node_words(node));
    return NULL;
}
