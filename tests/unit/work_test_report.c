/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Every reading use case on the sample: the report is sound in all three forms, holds
 * what it must, and the query decides what it is about. */
#include <string.h>

#include "json_check.h"
#include "moments.h"
#include "work_test.h"

/* As few as there may be: what is looked at here is not how sure it is. */
static const ohmen_query few_samples = {.samples = 256};

struct made {
    struct arena *a;
    ohmen_register *reg;
};

static struct made made_new(void)
{
    struct made m = {.a = test_arena()};
    m.reg = test_open(test_skerry(m.a), OHMEN_READ);
    return m;
}

static void made_end(struct made *m)
{
    ohmen_close(m->reg);
    arena_free(m->a);
}

static const char *hazards(struct made *m, const ohmen_query *q)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_hazards(m->reg, q, &r, &e), &e);
    return test_json(m->a, r);
}

static const char *list(struct made *m, const char *kind)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_list(m->reg, NULL, kind, &r, &e), &e);
    return test_json(m->a, r);
}

static const char *show(struct made *m, const char *id)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_show(m->reg, NULL, id, &r, &e), &e);
    return test_json(m->a, r);
}

static const char *grid(struct made *m, const char *decision)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_grid(m->reg, NULL, decision, &r, &e), &e);
    return test_json(m->a, r);
}

static const char *weigh(struct made *m, const char *decision)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_weigh(m->reg, &few_samples, decision, &r, &e), &e);
    return test_json(m->a, r);
}

START_TEST(hazards_are_ranked)
{
    struct made m = made_new();
    const char *json = hazards(&m, NULL);
    ck_assert_uint_eq(test_count(json, "{\"rank\": {"), 20);
    ck_assert_ptr_nonnull(strstr(json, "\"hazard\": \"H-GU-CABLE\""));
    made_end(&m);
}
END_TEST

START_TEST(a_site_leaves_only_its_hazards)
{
    struct made m = made_new();
    ohmen_query q = ohmen_query_defaults();
    q.site = "TQ";
    const char *json = hazards(&m, &q);
    ck_assert_uint_eq(test_count(json, "{\"rank\": {"), 4);
    ck_assert_uint_eq(test_count(json, "\"hazard\": \"H-TQ-"), 4);
    q.site = "VH"; /* TQ lies in VH */
    json = hazards(&m, &q);
    ck_assert_uint_eq(test_count(json, "{\"rank\": {"), 16);
    ck_assert_uint_eq(test_count(json, "\"hazard\": \"H-TQ-"), 4);
    ck_assert_uint_eq(test_count(json, "\"hazard\": \"H-GU-"), 0);
    made_end(&m);
}
END_TEST

/* The damage that counts differs; how often things happen does not. */
START_TEST(perspectives_count_their_categories)
{
    struct made m = made_new();
    ohmen_query q = ohmen_query_defaults();
    const char *own = hazards(&m, NULL);
    q.perspective = "society";
    ck_assert_str_eq(hazards(&m, &q), own);
    q.perspective = "company";
    const char *company = hazards(&m, &q);
    q.perspective = "all";
    const char *all = hazards(&m, &q);
    ck_assert_str_ne(company, own);
    ck_assert_str_ne(all, own);
    ck_assert_str_ne(all, company);
    made_end(&m);
}
END_TEST

START_TEST(every_kind_is_listed)
{
    static const struct {
        const char *kind;
        size_t n;
    } lists[] = {{"sources", 13}, {"sites", 3},    {"groups", 2},    {"values", 14},
                 {"rates", 12},   {"types", 7},    {"elements", 51}, {"common-cause", 4},
                 {"schemes", 20}, {"hazards", 20}, {"options", 23},  {"decisions", 8},
                 {"states", 3}};
    struct made m = made_new();
    for (size_t i = 0; i < sizeof lists / sizeof *lists; i++) {
        const char *json = list(&m, lists[i].kind);
        ck_assert_msg(test_count(json, "{\"id\": \"") == lists[i].n, "%s: %s", lists[i].kind, json);
    }
    made_end(&m);
}
END_TEST

START_TEST(every_object_is_shown)
{
    static const char *const sections[] = {
        "sources",      "sites",   "groups",  "values",  "rates",     "types", "elements",
        "common-cause", "schemes", "hazards", "options", "decisions", "states"};
    struct made m = made_new();
    size_t shown = 0;
    for (size_t i = 0; i < sizeof sections / sizeof *sections; i++) {
        const char *mark = "{\"id\": \"", *s = list(&m, sections[i]);
        while ((s = strstr(s, mark)) != NULL) {
            s += strlen(mark);
            if (shown++ % (5 * MOMENT_STEP) == 0) /* each is a job of its own */
                show(&m, arena_strn(m.a, s, strcspn(s, "\"")));
        }
    }
    show(&m, "register");
    ck_assert_uint_eq(shown, 180);
    made_end(&m);
}
END_TEST

START_TEST(a_hazard_is_shown_with_its_ends_and_an_element_with_its_users)
{
    struct made m = made_new();
    ck_assert_ptr_nonnull(strstr(show(&m, "H-VH-BUS1"), "never/no-fire"));
    ck_assert_ptr_nonnull(strstr(show(&m, "VH-51A"), "VH-INC1"));
    ck_assert_ptr_nonnull(strstr(show(&m, "VH-INC1"), "H-VH-BUS1"));
    made_end(&m);
}
END_TEST

START_TEST(decisions_are_weighed)
{
    struct made m = made_new();
    const char *json = weigh(&m, "D-VH-BUS");
    ck_assert_ptr_nonnull(strstr(json, "\"key\": \"recommendation\""));
    ck_assert_ptr_nonnull(strstr(json, "\"key\": \"cautions\""));
    /* FIT-87B and FIT-BLOCK exclude each other; TQ-QUENCH requires TQ-ARC */
    ck_assert_ptr_null(strstr(json, "FIT-87B+FIT-BF+FIT-BLOCK"));
    json = weigh(&m, "D-TQ");
    ck_assert_ptr_null(strstr(json, "\"D-TQ.total.TQ-QUENCH\""));
    ck_assert_ptr_nonnull(strstr(json, "\"D-TQ.total.TQ-ARC+TQ-QUENCH\""));
    weigh(&m, "D-GU");
    made_end(&m);
}
END_TEST

START_TEST(grids_mark_each_hazard)
{
    struct made m = made_new();
    const char *all = grid(&m, NULL);
    size_t parts = test_count(all, "\"part-of\": ");
    ck_assert_uint_gt(parts, 0);
    ck_assert_uint_eq(test_count(all, "{\"label\": ") - parts, 20);
    ck_assert_uint_eq(test_count(all, "\"from\": "), 0);
    const char *one = grid(&m, "D-TQ");
    ck_assert_uint_ge(test_count(one, "\"from\": \"1\""), 3);
    made_end(&m);
}
END_TEST

/* --- the page and the text --- */

static ohmen_report *memo(struct made *m, const char *decision)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_memo(m->reg, &few_samples, decision, &r, &e), &e);
    return r;
}

/* Spans stand inside words: a number is cut at its point, so that points align. */
static bool ends_word(const char *tag)
{
    return !text_starts(tag, "<span") && !text_starts(tag, "</span");
}

/* The words of a page: what stands outside its tags, blanks between. */
static char *page_words(struct arena *a, const char *html)
{
    char *words = arena_str(a, html), *to = words;
    bool in_tag = false;
    for (const char *p = html; *p; p++) {
        if (*p == '<' && ends_word(p))
            *to++ = ' ';
        if (*p == '<' || *p == '>')
            in_tag = *p == '<';
        else if (!in_tag)
            *to++ = *p == '\n' ? ' ' : *p;
    }
    *to = 0;
    return words;
}

static bool is_number(const char *word)
{
    bool digit = false;
    for (const char *p = word; *p; p++) {
        digit = digit || (*p >= '0' && *p <= '9');
        if (!strchr("0123456789.-+e", *p))
            return false;
    }
    return digit;
}

/* Does a word stand in a text, with blanks or signs around it? */
static bool has_word(const char *text, const char *word)
{
    size_t n = strlen(word);
    for (const char *p = strstr(text, word); p; p = strstr(p + 1, word)) {
        bool begins = p == text || !strchr("0123456789.e", p[-1]);
        if (begins && !strchr("0123456789.e", p[n]))
            return true;
    }
    return false;
}

/* Every figure that the data name stands on the page under its name, and every number of the
 * text, as it is rounded there, stands on it. */
START_TEST(the_page_has_what_the_text_has)
{
    static const char mark[] = "\"figure\": \"";
    struct made m = made_new();
    const char *json = test_json(m.a, memo(&m, "D-VH-DARK"));
    ohmen_report *r = memo(&m, "D-VH-DARK");
    ohmen_layout layout = ohmen_layout_defaults();
    layout.width = 200;
    char *html = arena_str(m.a, ohmen_report_html(r));
    char *text = arena_str(m.a, ohmen_report_text(r, &layout));
    ohmen_report_free(r);
    size_t figures = 0, numbers = 0;
    for (const char *p = strstr(json, mark); p; p = strstr(p, mark), figures++) {
        p += strlen(mark);
        const char *name = arena_strn(m.a, p, strcspn(p, "\""));
        ck_assert_msg(strstr(html, arena_printf(m.a, "data-figure=\"%s\"", name)), "%s", name);
    }
    const char *words = page_words(m.a, html);
    for (char *word = strtok(text, " \n"); word; word = strtok(NULL, " \n"))
        if (is_number(word)) {
            numbers++;
            ck_assert_msg(has_word(words, word), "%s is not on the page", word);
        }
    ck_assert_uint_gt(figures, 150);
    ck_assert_uint_gt(numbers, 250);
    made_end(&m);
}
END_TEST

START_TEST(the_whole_report)
{
    static const char *const parts[] = {"title-block", "summary", "hazards", "grid",
                                        "inputs",      "sources", "cautions"};
    struct made m = made_new();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_report_all(m.reg, &few_samples, &r, &e), &e);
    const char *json = test_json(m.a, r);
    for (size_t i = 0; i < sizeof parts / sizeof *parts; i++)
        ck_assert_msg(strstr(json, arena_printf(m.a, "{\"key\": \"%s\"", parts[i])) != NULL,
                      "there is no block \"%s\"", parts[i]);
    ck_assert_ptr_nonnull(strstr(json, "D-GU"));
    ck_assert_ptr_nonnull(strstr(json, "2026-12-01T08:00:00Z"));
    made_end(&m);
}
END_TEST

/* Widths are clamped, and every writer may be asked again. */
START_TEST(layouts)
{
    struct made m = made_new();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_report_all(m.reg, &few_samples, &r, &e), &e);
    ohmen_layout narrow = ohmen_layout_defaults(), least = narrow, wide = narrow, most = narrow;
    narrow.width = 1;
    least.width = 60;
    wide.width = 100000;
    most.width = 200;
    ck_assert_str_eq(ohmen_report_text(r, &narrow), ohmen_report_text(r, &least));
    ck_assert_str_eq(ohmen_report_text(r, &wide), ohmen_report_text(r, &most));
    ck_assert_str_eq(ohmen_report_text(r, NULL), ohmen_report_text(r, NULL));
    ck_assert_str_eq(ohmen_report_json(r), ohmen_report_json(r));
    narrow.ascii = true;
    for (const char *s = ohmen_report_text(r, &narrow); *s; s++)
        ck_assert(*s == '\n' || (*s >= ' ' && *s <= '~'));
    ohmen_report_free(r);
    made_end(&m);
}
END_TEST

/* Columns are code points: no mark of a report combines with another or is wide. */
static size_t check_lines(const char *s, size_t width, bool ascii)
{
    size_t lines = 0, columns = 0;
    for (; *s; s++) {
        unsigned char byte = (unsigned char)*s;
        if (byte == '\n') {
            ck_assert_msg(columns <= width, "%zu columns of %zu in line %zu", columns, width,
                          lines);
            lines++;
            columns = 0;
            continue;
        }
        ck_assert(!ascii || (byte >= ' ' && byte <= '~'));
        columns += (byte & 0xC0) != 0x80;
    }
    return lines;
}

/* No line of the sample's whole report is wider than asked, and ASCII is ASCII. */
START_TEST(the_whole_report_fits)
{
    struct made m = made_new();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_report_all(m.reg, &few_samples, &r, &e), &e);
    for (unsigned width = 60; width <= 200; width += 20) {
        ohmen_layout layout = ohmen_layout_defaults();
        layout.width = width;
        for (int ascii = 0; ascii < 2; ascii++) {
            layout.ascii = ascii == 1;
            ck_assert_uint_gt(check_lines(ohmen_report_text(r, &layout), width, ascii == 1), 300);
        }
    }
    ohmen_report_free(r);
    made_end(&m);
}
END_TEST

START_TEST(the_schema_is_json)
{
    size_t bad;
    const char *s = ohmen_document_schema();
    ck_assert(json_check(s, strlen(s), &bad));
    ck_assert_str_eq(ohmen_version(), "0.1.0");
}
END_TEST

void work_report_tests(Suite *suite)
{
    TCase *t = tcase_create("reports");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, hazards_are_ranked);
    tcase_add_test(t, a_site_leaves_only_its_hazards);
    tcase_add_test(t, perspectives_count_their_categories);
    tcase_add_test(t, every_kind_is_listed);
    tcase_add_test(t, every_object_is_shown);
    tcase_add_test(t, a_hazard_is_shown_with_its_ends_and_an_element_with_its_users);
    tcase_add_test(t, decisions_are_weighed);
    tcase_add_test(t, grids_mark_each_hazard);
    tcase_add_test(t, the_page_has_what_the_text_has);
    tcase_add_test(t, the_whole_report);
    tcase_add_test(t, layouts);
    tcase_add_test(t, the_whole_report_fits);
    tcase_add_test(t, the_schema_is_json);
    suite_add_tcase(suite, t);
}
