/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any bytes as canonical JSON. What is read is written back byte for byte; what is
 * refused leaves the output alone and has a sentence. */
#include <string.h>

#include "base/text.h"
#include "base/utf8.h"
#include "doc/json.h"
#include "fuzz.h"

const char *const fuzz_words[] = {
    "{", "}", "[", "]", ",", ":", "\"", "\\\"", "\\\\", "\\n", "\\u0001", "\\u000a", "\\u00E9",
    "\\/", "true", "false", "null", "0", "01", "-1", "1.5", "1e3", "9007199254740991",
    "9007199254740992", "{}", "[]", "\"\"", "\"a\":1", ",\"a\":1", " ", "\n", "\xC3\xA9",
    "e\xCC\x81", "\xFF", "[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[",
    NULL};

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    struct arena *a = fuzz_arena();
    struct node *n = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = json_read(a, (const char *)data, size, "tree", &n, &e);
    REQUIRE(status == e.status);
    if (status == OHMEN_OK) {
        struct text again;
        text_init(&again, a);
        json_write(&again, n);
        REQUIRE(again.n == size && memcmp(text_str(&again), data, size) == 0);
    } else {
        REQUIRE(status == OHMEN_REGISTER && n == NULL);
        REQUIRE(strlen(e.text) > 0 && utf8_check(e.text, strlen(e.text)) == strlen(e.text));
    }
    arena_free(a);
    return 0;
}
