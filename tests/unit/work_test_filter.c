/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Conditions and orders of lists: which objects are left, in which order, and what is refused.
 * The expected lists are worked out by hand from the register below. */
#include <string.h>

#include "base/text.h"
#include "json_check.h"
#include "work_test.h"

/* Means: V-LOG is a lognormal of median 1 kEUR and error factor 3, so of mean
 * 1 kEUR exp((ln 3 / 1.6448536)^2 / 2) = 1.2499 kEUR; V-FLAT of 1 h .. 3 h is 2 h. */
static const char described[] =
    "register: {title: Filter, currency: EUR, prices: 2026, horizon: 10 a, discount: 3 % per a,\n"
    "  counts: [section]}\n"
    "sources:\n"
    "  S-YES: {title: Stra\xC3\x9F"
    "enverzeichnis, verified: yes}\n"
    "  S-NO: {title: \"\xCE\x9F\xCE\x94\xCE\x9F\xCE\xA3\", verified: no, date: 2020-02-29}\n"
    "  S-OPEN: {title: Cafe\xCC\x81, date: 2019-12-31}\n"
    "sites:\n"
    "  TOWN: {name: Town, customers: 9400, load: 11 MW}\n"
    "  QUAY: {name: Quay, in: TOWN, customers: 0}\n"
    "  SHED: {name: Shed, in: QUAY, load: 800 kW}\n"
    "  ISLE: {name: Isle, load: 0.9 MW}\n"
    "values:\n"
    "  V-LOG: {is: {median: 1 kEUR, error-factor: 3}}\n"
    "  V-MONEY: 1200 EUR\n"
    "  V-FLAT: {is: {shape: uniform, from: 1 h, to: 3 h}}\n"
    "  V-TIME: 7200 s\n"
    "  V-FORM: {is: 2 * V-MONEY}\n"
    "  V-VARY: {varies: {shape: uniform, from: 1 h, to: 3 h}, source: S-YES}\n"
    "elements:\n"
    "  E-A: {name: b, kind: relay, site: SHED, per-demand: 1 %, test: {every: 4 a}}\n"
    "  E-B: {name: A, kind: relay, site: TOWN, per-demand: {prior: jeffreys, failures: 1,\n"
    "    demands: 20}, test: {every: 48 month, last: 2024-06-30}}\n"
    "  E-C: {name: B, kind: breaker, per-demand: 1 %, test: {every: 35040 h}}\n"
    "  E-D: {name: a, kind: breaker, site: ISLE, per-demand: 1 %, test: {every: 1 a}}\n"
    "  E-E: {per-demand: 1 %}\n"
    "schemes:\n"
    "  MAIN: {works: {all: [E-A, E-B]}}\n"
    "options:\n"
    "  O-1: {name: One, invest: 10 kEUR, in-service: 2028, change: {elements: {E-A: {per-demand: "
    "2 %}}}}\n"
    "  O-2: {name: Two, invest: {is: 0.02 MEUR, source: S-YES}, in-service: 2027-12-31,\n"
    "    excludes: [O-1], change: {elements: {E-A: {per-demand: 3 %}}}}\n"
    "  O-3: {name: Three, excludes: [O-1, O-2], change: {elements: {E-A: {per-demand: 4 %}}}}\n";

static struct arena *arena;
static const char *reg;

static void setup(void)
{
    arena = test_arena();
    reg = test_new(arena);
    test_import_text(arena, reg, described);
}

static void teardown(void)
{
    arena_free(arena);
}

#define CONDITIONS 3
struct asked {
    const char *kind, *where[CONDITIONS], *sort;
    bool reverse;
    const char *expected; /* ids, or a part of the error's text */
};

static ohmen_status ask(const struct asked *q, ohmen_report **out, ohmen_error *e)
{
    ohmen_query query = ohmen_query_defaults();
    ohmen_register *open = test_open(reg, OHMEN_READ);
    query.where = q->where;
    while (query.n_where < CONDITIONS && q->where[query.n_where])
        query.n_where++;
    query.sort = q->sort;
    query.reverse = q->reverse;
    ohmen_status status = ohmen_list(open, &query, q->kind, out, e);
    ohmen_close(open);
    return status;
}

static const char *ids(const char *json)
{
    struct text t;
    text_init(&t, arena);
    for (int i = 0;; i++) {
        size_t n;
        const char *id = json_pick(json, arena_printf(arena, "blocks/0/rows/%d/id", i), &n);
        if (!id)
            return text_str(&t);
        text_printf(&t, "%s%.*s", i ? " " : "", (int)n - 2, id + 1);
    }
}

/* --- what is left --- */

static const struct asked right[] = {
    /* no condition, and no order */
    {"elements", {0}, NULL, false, "E-A E-B E-C E-D E-E"},
    /* case: full folding, composed or not, final sigma */
    {"sources", {"title=STRASSENVERZEICHNIS"}, NULL, false, "S-YES"},
    {"sources", {"title~strasse"}, NULL, false, "S-YES"},
    {"sources", {"name=CAF\xC3\x89"}, NULL, false, "S-OPEN"},
    {"sources", {"title=\xCE\xBF\xCE\xB4\xCE\xBF\xCF\x82"}, NULL, false, "S-NO"},
    {"sources", {"id=s-yes"}, NULL, false, "S-YES"},
    {"sources", {" title  =  cafe\xCC\x81  "}, NULL, false, "S-OPEN"},
    /* yes and no, and neither */
    {"sources", {"verified=no"}, NULL, false, "S-NO"},
    {"sources", {"verified!=no"}, NULL, false, "S-OPEN S-YES"},
    {"sources", {"verified="}, NULL, false, "S-OPEN"},
    {"sources", {"verified!="}, NULL, false, "S-NO S-YES"},
    /* dates */
    {"sources", {"date>2019-12-31"}, NULL, false, "S-NO"},
    {"sources", {"date>=2019-12-31"}, NULL, false, "S-NO S-OPEN"},
    {"sources", {"date<2020-02-29"}, NULL, false, "S-OPEN"},
    {"sources", {"date=2020-02-29"}, NULL, false, "S-NO"},
    {"sources", {"date!=2020-02-29"}, NULL, false, "S-OPEN S-YES"},
    {"sources", {"date~2020"}, NULL, false, "S-NO"},
    {"options", {"in-service<2028"}, NULL, false, "O-2"},
    {"options", {"in-service=2028-01-01"}, NULL, false, "O-1"},
    /* counts, where nought is given and absent is not */
    {"sites", {"customers<1"}, NULL, false, "QUAY"},
    {"sites", {"customers="}, NULL, false, "ISLE SHED"},
    {"sites", {"customers!=0"}, NULL, false, "ISLE SHED TOWN"},
    /* quantities by value, whatever the unit */
    {"elements", {"test/every=4 a"}, NULL, false, "E-A E-B E-C"},
    {"elements", {"test/every=48 month"}, NULL, false, "E-A E-B E-C"},
    {"elements", {"test/every<4 a"}, NULL, false, "E-D"},
    {"elements", {"test/every<=35040 h"}, NULL, false, "E-A E-B E-C E-D"},
    {"elements", {"test/every>1460 d"}, NULL, false, ""},
    {"sites", {"load>850 kW", "load<1 MW"}, NULL, false, "ISLE"},
    /* of any dimension: only those of the same one; distributions by their mean */
    {"values", {"is>1249 EUR"}, NULL, false, "V-LOG"},
    {"values", {"is<1250 EUR"}, NULL, false, "V-LOG V-MONEY"},
    {"values", {"is>1250 EUR"}, NULL, false, ""},
    {"values", {"is=2 h"}, NULL, false, "V-FLAT V-TIME"},
    {"values", {"varies=120 min"}, NULL, false, "V-VARY"},
    /* a formula reads the same or does not */
    {"values", {"is=2*V-MONEY"}, NULL, false, "V-FORM"},
    {"values", {"is~v-money"}, NULL, false, "V-FORM"},
    /* short forms, and what is given beside them */
    {"options", {"invest=20 kEUR"}, NULL, false, "O-2"},
    {"options", {"invest/is>=10 kEUR"}, NULL, false, "O-1 O-2"},
    {"options", {"invest="}, NULL, false, "O-3"},
    {"options", {"invest/source!="}, NULL, false, "O-2"},
    {"elements", {"per-demand="}, NULL, false, ""},
    {"elements", {"per-demand/is="}, NULL, false, "E-B"},
    {"elements", {"per-demand=0.01"}, NULL, false, "E-A E-C E-D E-E"},
    /* sites with those inside, words, sets, structures, several conditions */
    {"elements", {"site=TOWN"}, NULL, false, "E-A E-B"},
    {"elements", {"site=quay"}, NULL, false, "E-A"},
    {"elements", {"site!=TOWN"}, NULL, false, "E-C E-D E-E"},
    {"elements", {"site~OW"}, NULL, false, "E-B"},
    {"sites", {"in=TOWN"}, NULL, false, "QUAY SHED"},
    {"elements", {"kind=Breaker", "site="}, NULL, false, "E-C"},
    {"options", {"excludes=O-1"}, NULL, false, "O-2 O-3"},
    {"options", {"excludes!=O-2"}, NULL, false, "O-1 O-2"},
    {"schemes", {"works~e-b"}, NULL, false, "MAIN"},
    {"schemes", {"trips-on="}, NULL, false, "MAIN"},
    /* a text behind the first sign is a text */
    {"sources", {"title==<>~!"}, NULL, false, ""},
    {"sources", {"title!=%s%n'\";--"}, NULL, false, "S-NO S-OPEN S-YES"},
    /* orders: by value, the same by id, absent last either way */
    {"elements", {0}, "test/every", false, "E-D E-A E-B E-C E-E"},
    {"elements", {0}, "test/every", true, "E-A E-B E-C E-D E-E"},
    {"elements", {0}, "name", false, "E-B E-D E-A E-C E-E"},
    {"elements", {0}, "name", true, "E-A E-C E-B E-D E-E"},
    {"elements", {0}, "id", true, "E-E E-D E-C E-B E-A"},
    {"sites", {0}, "load", false, "SHED ISLE TOWN QUAY"},
    {"sites", {0}, "customers", true, "TOWN QUAY ISLE SHED"},
    {"sources", {"verified!=yes"}, "date", false, "S-OPEN S-NO"},
    {"options", {0}, "in-service", true, "O-1 O-2 O-3"},
    /* money before time (EUR before a), formulas behind numbers */
    {"values", {0}, "is", false, "V-MONEY V-LOG V-FLAT V-TIME V-FORM V-VARY"},
    {"options", {0}, "excludes", false, "O-2 O-3 O-1"},
};

START_TEST(left_and_in_order)
{
    const struct asked *q = &right[_i];
    ohmen_report *report = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ask(q, &report, &e), &e);
    const char *found = ids(test_json(arena, report));
    ck_assert_msg(text_equal(found, q->expected), "%s %s, by %s: %s, expected %s", q->kind,
                  q->where[0] ? q->where[0] : "", q->sort ? q->sort : "", found, q->expected);
}
END_TEST

/* --- what is refused --- */

static const struct {
    struct asked asked;
    ohmen_status status;
} wrong[] = {
    {{"elements", {"kind"}, NULL, false, "is no condition"}, OHMEN_USAGE},
    {{"elements", {""}, NULL, false, "is no condition"}, OHMEN_USAGE},
    {{"elements", {"=relay"}, NULL, false, "is no condition"}, OHMEN_USAGE},
    {{"elements", {"!kind"}, NULL, false, "is no condition"}, OHMEN_USAGE},
    {{"elements", {"kind~"}, NULL, false, "is no condition"}, OHMEN_USAGE},
    {{"elements", {"test/every<"}, NULL, false, "is no condition"}, OHMEN_USAGE},
    {{"elements", {"kinds=relay"}, NULL, false, "did you mean \"kind\""}, OHMEN_UNKNOWN},
    {{"elements", {"idd=E-A"}, NULL, false, "did you mean \"id\""}, OHMEN_UNKNOWN},
    {{"elements", {"test/ever=1 a"}, NULL, false, "did you mean \"test/every\""}, OHMEN_UNKNOWN},
    {{"elements", {"test/=1 a"}, NULL, false, "no field \"test/\""}, OHMEN_UNKNOWN},
    {{"elements", {"/test=1 a"}, NULL, false, "no field \"/test\""}, OHMEN_UNKNOWN},
    {{"elements", {"name/first=a"}, NULL, false, "no field \"name/first\""}, OHMEN_UNKNOWN},
    {{"elements", {"risk>1"}, NULL, false, "no field \"risk\""}, OHMEN_UNKNOWN},
    {{"elements", {"name<b"}, NULL, false, "is a text: = and != fit it"}, OHMEN_USAGE},
    {{"elements", {"site>TOWN"}, NULL, false, "is the id of an object"}, OHMEN_USAGE},
    {{"elements", {"test=4 a"}, NULL, false, "is no single value"}, OHMEN_USAGE},
    {{"elements", {"kind=rely"}, NULL, false, "did you mean \"relay\""}, OHMEN_USAGE},
    {{"elements", {"site=TWON"}, NULL, false, "did you mean \"TOWN\""}, OHMEN_UNKNOWN},
    {{"elements", {"site=E-A"}, NULL, false, "not the id of a site"}, OHMEN_UNKNOWN},
    {{"options", {"excludes=O-9"}, NULL, false, "not the id of an option"}, OHMEN_UNKNOWN},
    {{"elements", {"test/every<4"}, NULL, false, "is a pure number"}, OHMEN_USAGE},
    {{"elements", {"test/every=4 km"}, NULL, false, "a time such as 2 h"}, OHMEN_USAGE},
    {{"elements", {"test/every<4 yeers"}, NULL, false, "a time such as 2 h"}, OHMEN_USAGE},
    {{"elements", {"test/every<1 a + 1 km"}, NULL, false, "a time such as 2 h"}, OHMEN_USAGE},
    {{"elements", {"test/every<V-TIME"}, NULL, false, "is no single number"}, OHMEN_USAGE},
    {{"elements", {"test/every<1 a / 0"}, NULL, false, "no finite number"}, OHMEN_USAGE},
    {{"sites", {"customers<-1"}, NULL, false, "no whole number"}, OHMEN_USAGE},
    {{"sites", {"customers=1.5"}, NULL, false, "no whole number"}, OHMEN_USAGE},
    {{"sources", {"date<2020"}, NULL, false, "no date"}, OHMEN_USAGE},
    {{"sources", {"date=2019-02-29"}, NULL, false, "no date"}, OHMEN_USAGE},
    {{"options", {"in-service=0000"}, NULL, false, "neither a year"}, OHMEN_USAGE},
    {{"sources", {"verified=1"}, NULL, false, "none of yes, no"}, OHMEN_USAGE},
    {{"sources", {"title=\xFF"}, NULL, false, "not valid UTF-8"}, OHMEN_USAGE},
    {{"sources", {0}, "\xC3", false, "not valid UTF-8"}, OHMEN_USAGE},
    {{"elements", {0}, "nam", false, "did you mean \"name\""}, OHMEN_UNKNOWN},
    {{"elements", {0}, "test", false, "nothing can be sorted by it"}, OHMEN_USAGE},
    {{"elements", {0}, NULL, true, "needs a field"}, OHMEN_USAGE},
    /* the second condition is read too */
    {{"elements", {"kind=relay", "nmae=a"}, NULL, false, "did you mean \"name\""}, OHMEN_UNKNOWN},
};

START_TEST(refused)
{
    const struct asked *q = &wrong[_i].asked;
    ohmen_report *report = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(ask(q, &report, &e), wrong[_i].status);
    ck_assert_ptr_null(report);
    ck_assert_msg(strstr(e.text, q->expected), "%s: %s, expected %s", q->where[0], e.text,
                  q->expected);
}
END_TEST

/* A field that is asked for has a column, each once; the note tells what is shown. */
START_TEST(what_is_asked_is_shown)
{
    const struct asked q = {
        "elements", {"test/last!=", "test/last>2000-01-01"}, "test/last", false, NULL};
    ohmen_report *report = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ask(&q, &report, &e), &e);
    const char *json = test_json(arena, report);
    ck_assert(json_is(json, "blocks/0/rows/0/test-last", "\"2024-06-30\""));
    ck_assert_uint_eq(test_count(json, "{\"key\": \"test-last\""), 1);
    ck_assert(json_is(json, "blocks/1/text",
                      "\"Shown: 1 of 5, where test/last!= and test/last>2000-01-01.\""));
    ck_assert(json_is(json, "blocks/2/text", "\"In rising order of test/last.\""));
}
END_TEST

#define COUNT(a) ((int)(sizeof(a) / sizeof *(a)))

void work_filter_tests(Suite *suite)
{
    TCase *t = tcase_create("filter");
    tcase_set_timeout(t, 60);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_loop_test(t, left_and_in_order, 0, COUNT(right));
    tcase_add_loop_test(t, refused, 0, COUNT(wrong));
    tcase_add_test(t, what_is_asked_is_shown);
    suite_add_tcase(suite, t);
}
