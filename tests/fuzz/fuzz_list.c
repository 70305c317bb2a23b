/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any bytes as a list of observations. What is read is written and read back as it was,
 * with the same identities; what is refused has diagnostics with places in the list. */
#include <string.h>

#include "base/text.h"
#include "doc/yaml.h"
#include "fuzz.h"
#include "model/documents.h"
#include "work/observations.h"

const char *const fuzz_words[] = {
    ",",      "\"",       "\"\"",      "\n",         "\r\n",       "date",       "kind",
    "object", "count",    "result",    "note",       "key",        "fault",      "trip",
    "test",   "passed",   "failed",    "2024-02-29", "2023-02-29", "0001-01-01", "9999-12-31",
    "R1",     "r1",       "R2",        "0",          "1",          "999999999",  "1000000000",
    "-1",     "1.0",      "1e3",       " ",          "content:",   "=1",         "@",
    "-7",     "\xC3\xA9", "e\xCC\x81", "\xFF",       "\n,,\n",     NULL};

static const char document[] =
    "register: {title: A register, currency: EUR, prices: 2026, horizon: 20 a, "
    "discount: 4 % per a}\n"
    "rates: {r1: {per: km a, is: 1 per km a}}\n"
    "elements: {R1: {per-demand: 0.1}, R2: {per-demand: 0.2}}\n";

static const struct model *load(struct arena *a)
{
    struct diags d;
    struct model_sources stored = {0}, all = {0};
    diags_init(&d, a);
    const struct node *root = yaml_read(a, "document", document, sizeof document - 1, &d);
    REQUIRE(root && documents_merge(a, &stored, 1, &root, &all, &d));
    const struct model *m = model_load(a, all.at, all.n, &d);
    REQUIRE(m != NULL);
    return m;
}

static void check_same(const struct store_observation *x, const struct store_observation *y)
{
    REQUIRE(text_equal(x->ident, y->ident) && x->day == y->day && x->count == y->count);
    REQUIRE(text_equal(x->what, y->what) && text_equal(x->subject, y->subject));
    REQUIRE(text_equal(x->result, y->result) && text_equal(x->note, y->note));
}

static void check_again(struct arena *a, const struct model *m, const struct store_observations *o)
{
    struct diags d;
    struct text t;
    struct store_observations again = {0};
    diags_init(&d, a);
    text_init(&t, a);
    observations_write(&t, o);
    const struct csv *csv = csv_read(a, "again", text_str(&t), t.n, &d);
    REQUIRE(csv != NULL);
    observations_read(a, m, csv, &again, &d);
    REQUIRE(d.count == 0 && again.n == o->n);
    for (size_t i = 0; i < o->n; i++)
        check_same(&o->at[i], &again.at[i]);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    struct arena *a = fuzz_arena();
    struct diags d;
    struct store_observations o = {0};
    const struct model *m = load(a);
    diags_init(&d, a);
    const struct csv *csv = csv_read(a, "input", (const char *)data, size, &d);
    if (csv)
        observations_read(a, m, csv, &o, &d);
    fuzz_check_diags(&d, (const char *)data, size);
    if (d.count == 0)
        check_again(a, m, &o);
    arena_free(a);
    return 0;
}
