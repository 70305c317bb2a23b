/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any bytes as a YAML document. What is read is written and read back as it was,
 * as YAML and as canonical JSON; what is refused has diagnostics with places. */
#include "base/text.h"
#include "doc/json.h"
#include "doc/yaml.h"
#include "fuzz.h"

const char *const fuzz_words[] = {
    ": ", ":", " #", "# ", "- ", "-", "? ", "---\n", "...\n", "{", "}", "[", "]", ", ", ",",
    "\"", "'", "|\n", ">\n", "|2-\n", "&a ", "*a", "!t ", "!!int ", "<<: ", "%TAG ! x\n",
    "%YAML 1.1\n", "\t", "\n\t", "\n", "\r\n", "\r", "\n  ", "\n    ", "  ", "~", "@", "`", "\\",
    "\"\\u00e9\"", "\"\\x07\"", "\\0", "\xC3\xA9", "e\xCC\x81", "\xEF\xBB\xBF", "\xE2\x80\xA8",
    "\xC2\x85", "\xFF", "\xED\xA0\x80", "\x7F", "name: x\n", "name:x", "max(1, 2)", "1,000 EUR",
    "hazards:\n  H-1: {", "[[[[[[[[[[[[[[[[[[[[[[", "{a: {a: {a: {a: {a: {a: {a: {a: ",
    "- - - - - - - - - - - - - - - - ", NULL};

static void check_yaml(struct arena *a, const struct node *n)
{
    struct diags d;
    struct text first, second;
    diags_init(&d, a);
    text_init(&first, a);
    text_init(&second, a);
    yaml_write(&first, n);
    const struct node *again = yaml_read(a, "again", text_str(&first), first.n, &d);
    REQUIRE(d.count == 0);
    REQUIRE(again != NULL && node_equal(n, again));
    yaml_write(&second, again);
    REQUIRE(text_equal(text_str(&first), text_str(&second)));
}

static void check_json(struct arena *a, const struct node *n)
{
    struct text json;
    struct node *again = NULL;
    text_init(&json, a);
    json_write(&json, n);
    REQUIRE(json_read(a, text_str(&json), json.n, "tree", &again, NULL) == OHMEN_OK);
    REQUIRE(node_equal(n, again));
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    struct arena *a = fuzz_arena();
    struct diags d;
    diags_init(&d, a);
    const struct node *n = yaml_read(a, "input", (const char *)data, size, &d);
    REQUIRE((n == NULL) == (d.count > 0));
    fuzz_check_diags(&d, (const char *)data, size);
    if (n) {
        REQUIRE(n->type == NODE_MAP);
        check_yaml(a, n);
        check_json(a, n);
    }
    arena_free(a);
    return 0;
}
