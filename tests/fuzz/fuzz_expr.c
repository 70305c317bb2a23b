/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any text as an expression. What is parsed is written in its canonical form,
 * which is parsed into an equal expression with the same form; what is refused has
 * one diagnostic with a place in the text. */
#include <string.h>

#include "base/text.h"
#include "base/utf8.h"
#include "fuzz.h"
#include "quantity/expr.h"

const char *const fuzz_words[] = {
    " + ", " - ", " * ", " / ", "*", "/", "-", "^2", "^-0.5", "(", ")", "; ", ",", " -> ", "1",
    "0.5", "1e-3", "1E400", "007", " %", "90 %", " kEUR", " EUR/kWh", " h", " per a",
    " per 100 km a", "1 in 340 a", " in ", " per ", " within ", "min(", "max(", "exp(", "log(",
    "sqrt(", "lookup(", "unwanted(", "fails(", "frequency(", "share(", "was",
    "clearance-time", "name-1",
    "kW h", "m^2", "section", "\t", "\n", "\xC3\xA9", "\xC2\xB5", ":", "..",
    "((((((((((((((((((((((((", "------------", NULL};

static const struct units units = {.currency = "EUR", .counts = {"section", "bay"}, .n_counts = 2};

static void check_again(struct arena *a, const struct expr *e)
{
    struct diags d;
    struct text first, second;
    diags_init(&d, a);
    text_init(&first, a);
    text_init(&second, a);
    expr_write(&first, e);
    if (first.n > EXPR_BYTES)
        return; /* canonical blanks may lengthen an expression beyond the limit */
    const struct expr *again =
        expr_parse(a, &units, text_str(&first), (struct place){.file = "again", .line = 1}, &d);
    REQUIRE(again != NULL && d.count == 0);
    REQUIRE(expr_equal(e, again));
    expr_write(&second, again);
    REQUIRE(text_equal(text_str(&first), text_str(&second)));
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    if (utf8_check((const char *)data, size) < size)
        return 0; /* texts come from readers that refuse this */
    struct arena *a = fuzz_arena();
    const char *s = arena_strn(a, (const char *)data, size);
    struct place at = {.file = "input", .line = 1, .column = 1};
    struct diags d;
    diags_init(&d, a);
    const struct expr *e = expr_parse(a, &units, s, at, &d);
    REQUIRE((e == NULL) == (d.count == 1) && d.count <= 1);
    if (e)
        check_again(a, e);
    for (size_t i = 0; i < d.list.n; i++) {
        const struct diag *x = &d.list.at[i];
        REQUIRE(strlen(x->text) > 0 && utf8_check(x->text, strlen(x->text)) == strlen(x->text));
        REQUIRE(x->place.line == 1 && x->place.column >= 1);
        REQUIRE(x->place.column <= utf8_count(s, size) + 1);
    }
    arena_free(a);
    return 0;
}
