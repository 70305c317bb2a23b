/* SPDX-License-Identifier: GPL-3.0-or-later */
/* BLAKE2b-256 by libsodium, and the lines that preimages are made of. Owns nothing.
 * Invariant: two different lists of fields never make the same bytes, since texts are
 * JSON strings (no raw line feed, no raw quote) and words are free of blanks. */
#include "store/journal.h"

#include <string.h>

#include "doc/json.h"

enum { HASH_BYTES = 32 };

void store_hash(const void *bytes, size_t n, char hash[STORE_HASH_TEXT])
{
    unsigned char raw[HASH_BYTES];
    crypto_generichash(raw, sizeof raw, bytes, n, NULL, 0);
    sodium_bin2hex(hash, STORE_HASH_TEXT, raw, sizeof raw);
}

static void feed(struct hashing *h, const char *s, size_t n)
{
    crypto_generichash_update(&h->state, (const unsigned char *)s, n);
}

void hashing_begin(struct hashing *h, struct arena *a, const char *type_line)
{
    crypto_generichash_init(&h->state, NULL, 0, HASH_BYTES);
    text_init(&h->line, a);
    hashing_word(h, type_line);
    hashing_line(h);
}

void hashing_word(struct hashing *h, const char *word)
{
    if (h->line.n > 0)
        text_byte(&h->line, ' ');
    text_add(&h->line, word);
}

void hashing_text(struct hashing *h, const char *s)
{
    if (!s) {
        hashing_word(h, "null");
        return;
    }
    if (h->line.n > 0)
        text_byte(&h->line, ' ');
    json_string(&h->line, s);
}

void hashing_int(struct hashing *h, int64_t n)
{
    if (h->line.n > 0)
        text_byte(&h->line, ' ');
    text_printf(&h->line, "%lld", (long long)n);
}

void hashing_line(struct hashing *h)
{
    text_byte(&h->line, '\n');
    feed(h, h->line.at, h->line.n);
    h->line.n = 0;
}

void hashing_end(struct hashing *h, char hash[STORE_HASH_TEXT])
{
    unsigned char raw[HASH_BYTES];
    crypto_generichash_final(&h->state, raw, sizeof raw);
    sodium_bin2hex(hash, STORE_HASH_TEXT, raw, sizeof raw);
}

void journal_body_hash(struct arena *a, const char *kind, int64_t format, const char *json,
                       size_t n, char hash[STORE_HASH_TEXT])
{
    struct hashing h;
    hashing_begin(&h, a, "ohmen body 1");
    hashing_word(&h, "kind");
    hashing_text(&h, kind);
    hashing_line(&h);
    hashing_word(&h, "format");
    hashing_int(&h, format);
    hashing_line(&h);
    hashing_word(&h, "bytes");
    hashing_int(&h, (int64_t)n);
    hashing_line(&h);
    feed(&h, json, n);
    hashing_end(&h, hash);
}
