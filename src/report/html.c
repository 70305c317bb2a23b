/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The HTML writer: one page that needs nothing else, the same blocks in the same order as
 * the text writer's. Headings, notes and the contents are written here; tables and pictures
 * have files of their own. Owns the scratch arena of one writing.
 * Invariant: no script, no address of anything outside the page, one <style>. */
#include "report/html.h"

#include <string.h>

enum { PAGE_WIDTH = 100000 /* columns: no table leaves anything out */, LEAST_CONTENTS = 3 };

/* --- the contents --- */

static bool has_title(const struct block *b)
{
    return b->title && *b->title;
}

/* Ids of all blocks: of the key, of headings, which have none, of the title. */
static void choose_ids(struct html *h, const struct report *r)
{
    static const char *const own[] = {"main", "contents", "contents-head", "names"};
    for (size_t i = 0; i < sizeof own / sizeof *own; i++)
        html_id(h, own[i]);
    h->block_ids = NEW_ARRAY(h->page.arena, r->blocks.n, const char *);
    for (size_t i = 0; i < r->blocks.n; i++) {
        const struct block *b = &r->blocks.at[i];
        if (b->key || has_title(b))
            h->block_ids[i] = html_id(h, b->key ? b->key : b->title);
    }
}

/* What the contents list: headings below the first level, and titled blocks. */
static bool is_listed(const struct block *b)
{
    return has_title(b) && (b->type != BLOCK_HEADING || b->level > 1);
}

static void put_link(struct html *h, const struct block *b, const char *id)
{
    int level = b->type == BLOCK_HEADING ? b->level : 4;
    text_printf(h->out, "<li class=\"c%d\"><a href=\"#%s\">", level, id);
    html_text(h, b->title);
    html_raw(h, "</a></li>\n");
}

static bool has_contents(const struct report *r)
{
    size_t n = 0;
    for (size_t i = 0; i < r->blocks.n; i++)
        n += is_listed(&r->blocks.at[i]);
    return n >= LEAST_CONTENTS;
}

static void put_contents(struct html *h, const struct report *r)
{
    if (!has_contents(r))
        return;
    html_raw(h, "<nav id=\"contents\" aria-labelledby=\"contents-head\">\n"
                "<p id=\"contents-head\">Contents</p>\n<ul>\n");
    for (size_t i = 0; i < r->blocks.n; i++)
        if (is_listed(&r->blocks.at[i]))
            put_link(h, &r->blocks.at[i], h->block_ids[i]);
    html_raw(h, "</ul>\n</nav>\n");
}

/* --- headings and notes --- */

static void put_heading(struct html *h, const struct block *b, const char *id)
{
    h->section = b->title;
    text_printf(h->out, "<h%d id=\"%s\">", b->level, id ? id : html_id(h, "part"));
    html_text(h, b->title);
    text_printf(h->out, "</h%d>\n", b->level);
}

enum note_part { NOTE_NOTHING, NOTE_PARAGRAPH, NOTE_KEPT };

/* Ends what is open and begins what comes next, unless it is the same. */
static void turn_to(struct html *h, enum note_part *part, enum note_part next)
{
    static const char *const opening[] = {"", "<p>", "<pre>"};
    static const char *const closing[] = {"", "</p>\n", "</pre>\n"};
    if (*part == next)
        return;
    html_raw(h, closing[*part]);
    html_raw(h, opening[next]);
    *part = next;
}

/* Lines of a paragraph and kept lines, each in its own line of the page. */
static void put_note_line(struct html *h, enum note_part *part, const char *s)
{
    enum note_part next = s[strspn(s, " ")] == 0 ? NOTE_NOTHING
                          : text_starts(s, "  ") ? NOTE_KEPT
                                                 : NOTE_PARAGRAPH;
    bool goes_on = *part == next && next != NOTE_NOTHING;
    turn_to(h, part, next);
    if (next == NOTE_NOTHING)
        return;
    html_raw(h, goes_on ? "\n" : "");
    html_text(h, s);
}

/* A note may have a title, which the contents lead to. */
static void put_note_title(struct html *h, const struct block *b, const char *id)
{
    if (!has_title(b))
        return;
    text_printf(h->out, "<p class=\"title\" id=\"%s\">", id);
    html_text(h, b->title);
    html_raw(h, "</p>\n");
}

static void put_note(struct html *h, const struct block *b, const char *id)
{
    enum note_part part = NOTE_NOTHING;
    const char *s = b->text ? b->text : "";
    put_note_title(h, b, id);
    while (*s) {
        size_t n = strcspn(s, "\n");
        put_note_line(h, &part, arena_strn(h->page.arena, s, n));
        s += n + (s[n] == '\n');
    }
    turn_to(h, &part, NOTE_NOTHING);
}

static void put_block(struct html *h, const struct block *b, const char *id)
{
    switch (b->type) {
    case BLOCK_HEADING: put_heading(h, b, id); break;
    case BLOCK_NOTE: put_note(h, b, id); break;
    case BLOCK_PAIRS: html_pairs(h, b, id); break;
    case BLOCK_TABLE: html_table(h, b, id, b->title, NULL); break;
    case BLOCK_GRID: html_grid(h, b, id); break;
    case BLOCK_CURVE: html_curve(h, b, id); break;
    case BLOCK_SIGNATURES: html_signatures(h, b, id); break;
    case BLOCK_SWINGS: html_swings(h, b, id); break;
    case BLOCK_MAP: html_map(h, b, id); break;
    case BLOCK_SPREADS: html_spreads(h, b, id); break;
    case BLOCK_TREE: html_tree(h, b, id); break;
    case BLOCK_POLICY: html_policy(h, b, id); break;
    }
}

/* --- the page --- */

/* The first heading; where there is none, the first title, or else the first key. */
static const char *title_of(const struct report *r)
{
    const char *title = NULL, *key = NULL;
    for (size_t i = 0; i < r->blocks.n; i++) {
        const struct block *b = &r->blocks.at[i];
        if (b->type == BLOCK_HEADING)
            return b->title;
        title = !title && has_title(b) ? b->title : title;
        key = key ? key : b->key;
    }
    return title ? title : key ? key : "Report";
}

static bool is_picture(const struct block *b)
{
    return b->grid || b->curve || b->swings || b->map || b->spreads || b->tree || b->policy;
}

static bool has_figures(const struct report *r)
{
    for (size_t i = 0; i < r->blocks.n; i++) {
        const struct block *b = &r->blocks.at[i];
        if (is_picture(b))
            return true;
        for (size_t j = 0; j < b->rows.n; j++)
            for (size_t k = 0; k < b->rows.at[j].n; k++)
                if (b->rows.at[j].at[k].figure)
                    return true;
    }
    return false;
}

static void put_head(struct html *h, const struct report *r)
{
    html_raw(h, "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
                "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n"
                "<meta name=\"color-scheme\" content=\"light dark\">\n<title>");
    html_bare_text(h, title_of(r));
    html_raw(h, "</title>\n<style>\n");
    for (size_t i = 0; i < html_style_parts; i++)
        html_raw(h, html_style[i]);
    html_raw(h, "</style>\n</head>\n");
}

/* The contents follow a heading that opens the report, so that paper begins with it. */
static void put_body(struct html *h, const struct report *r)
{
    html_raw(h, has_contents(r) ? "<body class=\"long\">\n" : "<body>\n");
    html_raw(h, "<a class=\"skip\" href=\"#main\">Skip to the report</a>\n");
    if (has_figures(r))
        html_raw(h, "<input type=\"checkbox\" id=\"names\">"
                    "<label for=\"names\">Show the name of each figure</label>\n");
    html_raw(h, "<main id=\"main\" tabindex=\"-1\">\n");
    bool headed = r->blocks.n && r->blocks.at[0].type == BLOCK_HEADING;
    if (!headed)
        put_contents(h, r);
    for (size_t i = 0; i < r->blocks.n; i++) {
        put_block(h, &r->blocks.at[i], h->block_ids[i]);
        if (i == 0 && headed)
            put_contents(h, r);
    }
    html_raw(h, "</main>\n</body>\n</html>\n");
}

void report_write_html(struct text *out, const struct report *r)
{
    struct html h = {.out = out, .section = title_of(r)};
    h.page = (struct page){.arena = arena_child(out->arena), .width = PAGE_WIDTH};
    choose_ids(&h, r);
    put_head(&h, r);
    put_body(&h, r);
    arena_free(h.page.arena);
}
