/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Merging documents: sections, ids that stand twice, what is stored already, removal, and
 * objects that start from others. */
#include "model_test.h"

#include <string.h>

/* One document over what is stored. */
static bool merge(struct sheet *s, const struct model_sources *stored, const char *yaml,
                  struct model_sources *out)
{
    const struct node *root = sheet_yaml(s, yaml);
    sheet_fine(s);
    return documents_merge(s->arena, stored, 1, &root, out, &s->diags);
}

static struct model_sources nothing(void)
{
    return (struct model_sources){0};
}

/* The objects as "kind ID json" lines, in the order in which they came. */
static const char *listed(struct sheet *s, const struct model_sources *all)
{
    struct text t;
    text_init(&t, s->arena);
    for (size_t i = 0; i < all->n; i++)
        text_printf(&t, "%s %s %s\n", kinds[all->at[i].kind].name, all->at[i].id,
                    sheet_json(s, all->at[i].node));
    return text_str(&t);
}

static void becomes(const char *yaml, const char *lines)
{
    struct sheet s = sheet_new();
    struct model_sources none = nothing(), out = nothing();
    bool fine = merge(&s, &none, yaml, &out);
    sheet_fine(&s);
    ck_assert(fine);
    ck_assert_str_eq(listed(&s, &out), lines);
}

static void refused(const char *yaml, uint32_t line, uint32_t column, const char *word)
{
    struct sheet s = sheet_new();
    struct model_sources none = nothing(), out = nothing();
    ck_assert(!merge(&s, &none, yaml, &out));
    ck_assert_uint_eq(out.n, 0);
    sheet_expect(&s, line, column, word, NULL);
}

START_TEST(sections)
{
    becomes("sites:\n  A: {name: X}\nelements:\n", "site A {\"name\":\"X\"}\n");
    becomes("{}", "");
    refused("hazrds: {}", 1, 1, "there is no section \"hazrds\" (did you mean \"hazards\"?)");
    refused("remove: [A]", 1, 1, "(did you mean \"removed\"?)");
    refused("sites: [A]", 1, 8, "the section \"sites\" is a map of ids");
    refused("sites: x", 1, 8, "the section \"sites\" is a map of ids");
    refused("register: x", 1, 11, "the section \"register\" is a map of settings");
    refused("sites: {2b: {name: X}}", 1, 9, "\"2b\" cannot be an id");
    refused("sites: {km: {name: X}}", 1, 9, "\"km\" cannot be an id");
    refused("sites: {register: {name: X}}", 1, 9, "\"register\" is the id of the settings");
}
END_TEST

/* What `counts` declares is a unit, and so no id, wherever the settings stand. */
START_TEST(units_are_reserved)
{
    refused("sites: {bay: {name: X}}\nregister: {counts: [bay]}", 1, 9, "\"bay\" cannot be an id");
    becomes("sites: {bay: {name: X}}\n", "site bay {\"name\":\"X\"}\n");
}
END_TEST

START_TEST(ids_that_stand_twice)
{
    struct sheet s = sheet_new();
    struct model_sources out = nothing();
    refused("sites: {A: {name: X}}\nelements: {A: {kind: relay}}", 2, 12,
            "\"A\" stands twice; the first is at test.yaml:1:9");
    const struct node *roots[] = {sheet_yaml(&s, "sites: {A: {name: X}}"),
                                  sheet_yaml(&s, "\n\nsites: {A: {name: Y}}")};
    ck_assert(!sheet_merge(&s, 2, roots, &out));
    sheet_expect(&s, 3, 9, "\"A\" stands twice; the first is at test.yaml:1:9", NULL);
}
END_TEST

START_TEST(all_errors_of_all_documents)
{
    struct sheet s = sheet_new();
    struct model_sources out = nothing();
    const struct node *roots[] = {sheet_yaml(&s, "sitse: {}\nsites: {2b: {}, km: {}}"),
                                  sheet_yaml(&s, "removed: [X]\nvalues: {v: {like: w}}")};
    ck_assert(!sheet_merge(&s, 2, roots, &out));
    ck_assert_uint_eq(s.diags.count, 5);
}
END_TEST

/* --- what is stored --- */

static struct model_sources stored(struct sheet *s)
{
    struct model_sources none = nothing(), out = nothing();
    ck_assert(merge(s, &none,
                    "register: {counts: [bay]}\n"
                    "sites: {A: {name: X}, B: {name: Y}}\n"
                    "elements: {E: {per-demand: {is: '0.1'}}}\n",
                    &out));
    return out;
}

START_TEST(documents_over_what_is_stored)
{
    struct sheet s = sheet_new();
    struct model_sources before = stored(&s), out = nothing();
    ck_assert(merge(&s, &before, "sites: {B: {name: Z}, C: {name: W}}\nremoved: [A]", &out));
    ck_assert_str_eq(listed(&s, &out), "site B {\"name\":\"Z\"}\n"
                                       "site C {\"name\":\"W\"}\n"
                                       "register register {\"counts\":[\"bay\"]}\n"
                                       "element E {\"per-demand\":{\"is\":\"0.1\"}}\n");
}
END_TEST

static void refused_over(const char *yaml, uint32_t column, const char *word)
{
    struct sheet s = sheet_new();
    struct model_sources before = stored(&s), out = nothing();
    ck_assert(!merge(&s, &before, yaml, &out));
    sheet_expect(&s, 1, column, word, NULL);
}

START_TEST(what_clashes_with_what_is_stored)
{
    refused_over("elements: {A: {kind: relay}}", 12,
                 "\"A\" is a site in the register; ids are unique over all kinds");
    refused_over("sites: {bay: {name: X}}", 9, "\"bay\" cannot be an id");
    refused_over("removed: [Q]", 11, "there is no \"Q\" in the register to remove");
    refused_over("removed: [register]", 11, "there is no \"register\" in the register to remove");
    refused_over("removed: A", 10, "\"removed\" is a list of ids in square brackets");
    refused_over("removed: [[A]]", 11, "in the register to remove");
    refused_over("removed: [A, A]", 14, "\"A\" stands twice");
    refused_over("{removed: [A], sites: {A: {name: N}}}", 24, "\"A\" stands twice");
}
END_TEST

/* --- like --- */

START_TEST(objects_like_others)
{
    becomes("sites:\n"
            "  A: {name: X, note: n, customers: 3}\n"
            "  B: {like: A, name: Y, note: no}\n",
            "site A {\"customers\":\"3\",\"name\":\"X\",\"note\":\"n\"}\n"
            "site B {\"customers\":\"3\",\"name\":\"Y\"}\n");
    becomes("sites:\n"
            "  A: {like: B, load: 2 MW}\n"
            "  B: {like: C, name: Y}\n"
            "  C: {name: X, note: n}\n",
            "site A {\"load\":\"2 MW\",\"name\":\"Y\",\"note\":\"n\"}\n"
            "site B {\"name\":\"Y\",\"note\":\"n\"}\n"
            "site C {\"name\":\"X\",\"note\":\"n\"}\n");
    becomes("sites:\n"
            "  A: {name: X, note: n}\n"
            "  B: {like: A, note: 'no'}\n",
            "site A {\"name\":\"X\",\"note\":\"n\"}\n"
            "site B {\"name\":\"X\",\"note\":\"no\"}\n");
}
END_TEST

START_TEST(parts_like_others)
{
    becomes("hazards:\n"
            "  G: {response: {p: {in: 1 s}, q: {in: 2 s}}}\n"
            "  H: {like: G, response: {q: no, p: {sees: 0.5}, r: {in: 3 s}}}\n",
            "hazard G {\"response\":{\"p\":{\"in\":\"1 s\"},\"q\":{\"in\":\"2 s\"}}}\n"
            "hazard H {\"response\":{\"p\":{\"in\":\"1 s\",\"sees\":\"0.5\"},"
            "\"r\":{\"in\":\"3 s\"}}}\n");
    /* a structure replaces the one that was, however it is written */
    becomes("schemes:\n"
            "  S: {all: [A, B], name: N}\n"
            "  T: {like: S, any: [C]}\n"
            "  U: {like: S, works: D}\n"
            "  V: {like: S, name: M}\n",
            "scheme S {\"all\":[\"A\",\"B\"],\"name\":\"N\"}\n"
            "scheme T {\"any\":[\"C\"],\"name\":\"N\"}\n"
            "scheme U {\"name\":\"N\",\"works\":\"D\"}\n"
            "scheme V {\"all\":[\"A\",\"B\"],\"name\":\"M\"}\n");
    /* `no` is the value of a yes-or-no field */
    becomes("sources:\n"
            "  P: {title: X, verified: yes}\n"
            "  Q: {like: P, verified: no}\n",
            "source P {\"title\":\"X\",\"verified\":\"yes\"}\n"
            "source Q {\"title\":\"X\",\"verified\":\"no\"}\n");
}
END_TEST

START_TEST(like_what_is_stored)
{
    struct sheet s = sheet_new();
    struct model_sources before = stored(&s), out = nothing();
    ck_assert(
        merge(&s, &before, "elements: {F: {like: E, kind: relay}}\nsites: {B: {like: A}}", &out));
    ck_assert(text_starts(listed(&s, &out),
                          "element F {\"kind\":\"relay\",\"per-demand\":{\"is\":\"0.1\"}}\n"
                          "site B {\"name\":\"X\"}\n"));
}
END_TEST

/* What is stored can be like itself: only the fields that are named change. */
START_TEST(like_itself)
{
    struct sheet s = sheet_new();
    struct model_sources before = stored(&s), out = nothing();
    ck_assert(merge(&s, &before, "elements: {E: {like: E, kind: relay}}", &out));
    ck_assert(text_starts(listed(&s, &out),
                          "element E {\"kind\":\"relay\",\"per-demand\":{\"is\":\"0.1\"}}\n"));
}
END_TEST

START_TEST(like_that_is_wrong)
{
    refused("sites:\n  ALPHA: {name: X}\n  B: {like: ALHPA}", 3, 13,
            "there is no site \"ALHPA\" to start from (did you mean \"ALPHA\"?)");
    refused("sites:\n  A: {name: X}\nelements:\n  B: {like: A}", 4, 13,
            "there is no element \"A\" to start from");
    refused("sites:\n  A: {like: [B]}", 2, 13, "\"like\" names one object");
    refused("sites:\n  A: {like: A}", 2, 13, "\"A\" is not in the register yet");
    refused("schemes:\n  S: A\n  T: {like: S}", 3, 13, "\"S\" is written in one word");
}
END_TEST

START_TEST(circles_of_like)
{
    struct sheet s = sheet_new();
    struct model_sources none = nothing(), out = nothing();
    ck_assert(!merge(&s, &none, "sites: {A: {like: B}, B: {like: C}, C: {like: A}}", &out));
    ck_assert_uint_ge(s.diags.count, 1);
    for (size_t i = 0; i < s.diags.list.n; i++)
        ck_assert_ptr_nonnull(strstr(s.diags.list.at[i].text, "\"like\" leads in a circle"));
}
END_TEST

/* A chain of LIKE_DEPTH steps is followed, one more is refused. Ids are such that the
 * longest chain is resolved first. */
START_TEST(depth_of_like)
{
    for (unsigned steps = LIKE_DEPTH; steps <= LIKE_DEPTH + 1; steps++) {
        struct sheet s = sheet_new();
        struct model_sources none = nothing(), out = nothing();
        struct text yaml;
        text_init(&yaml, s.arena);
        text_add(&yaml, "sites:\n");
        for (unsigned i = 0; i < steps; i++)
            text_printf(&yaml, "  S%02u: {like: S%02u}\n", i, i + 1);
        text_printf(&yaml, "  S%02u: {name: X}\n", steps);
        ck_assert_int_eq(merge(&s, &none, text_str(&yaml), &out), steps == LIKE_DEPTH);
    }
}
END_TEST

Suite *suite_documents(void)
{
    Suite *s = suite_create("documents");
    TCase *t = tcase_create("documents");
    tcase_add_test(t, like_itself);
    tcase_add_test(t, sections);
    tcase_add_test(t, units_are_reserved);
    tcase_add_test(t, ids_that_stand_twice);
    tcase_add_test(t, all_errors_of_all_documents);
    tcase_add_test(t, documents_over_what_is_stored);
    tcase_add_test(t, what_clashes_with_what_is_stored);
    tcase_add_test(t, objects_like_others);
    tcase_add_test(t, parts_like_others);
    tcase_add_test(t, like_what_is_stored);
    tcase_add_test(t, like_that_is_wrong);
    tcase_add_test(t, circles_of_like);
    tcase_add_test(t, depth_of_like);
    suite_add_tcase(s, t);
    return s;
}
