/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Messages on standard error. Owns nothing. Invariant: a message is one line, and what
 * it quotes cannot reach the terminal as anything but visible text. */
#include "cli/message.h"

#include <stdarg.h>
#include <stdint.h>

ohmen_status message_set(ohmen_error *e, ohmen_status status, const char *format, ...)
{
    if (e->status != OHMEN_OK)
        return status;
    va_list args;
    va_start(args, format);
    vsnprintf(e->text, sizeof e->text, format, args);
    va_end(args);
    e->status = status;
    return status;
}

/* Bytes of the UTF-8 sequence that a first byte announces, 0 where it can begin none. */
static unsigned announced(unsigned char first)
{
    if (first < 0x80)
        return 1;
    if (first < 0xC2 || first > 0xF4)
        return 0;
    return first < 0xE0 ? 2 : first < 0xF0 ? 3 : 4;
}

/* Decodes one character; returns its bytes, 0 for what is not UTF-8 (RFC 3629: no
 * surrogates, no longer form than needed, nothing beyond U+10FFFF). */
static unsigned decode(const unsigned char *s, uint32_t *code)
{
    static const uint32_t smallest[] = {0, 0, 0x80, 0x800, 0x10000};
    unsigned n = announced(s[0]);
    if (n < 2) {
        *code = s[0];
        return n;
    }
    uint32_t c = s[0] & (0xFFu >> (n + 1));
    for (unsigned i = 1; i < n; i++) {
        if ((s[i] & 0xC0) != 0x80)
            return 0; /* the terminating zero ends here too */
        c = c << 6 | (s[i] & 0x3F);
    }
    if (c < smallest[n] || c > 0x10FFFF || (c >= 0xD800 && c <= 0xDFFF))
        return 0;
    *code = c;
    return n;
}

static bool is_harmless(uint32_t c, bool ascii)
{
    static const struct {
        uint32_t first, last;
    } harmful[] = {
        {0x00, 0x1F},     {0x7F, 0x9F},     {0x061C, 0x061C}, {0x200B, 0x200F},
        {0x2028, 0x202E}, {0x2060, 0x206F}, {0xFEFF, 0xFEFF}, {0xFFF9, 0xFFFB},
    };
    if (ascii && c > 0x7E)
        return false;
    for (size_t i = 0; i < sizeof harmful / sizeof harmful[0]; i++)
        if (c >= harmful[i].first && c <= harmful[i].last)
            return false;
    return true;
}

void message_text(FILE *to, const char *text, bool ascii)
{
    const unsigned char *s = (const unsigned char *)text;
    while (*s) {
        uint32_t code = 0;
        unsigned n = decode(s, &code);
        bool harmless = n > 0 && is_harmless(code, ascii);
        for (unsigned i = 0; i < (n ? n : 1); i++)
            fprintf(to, harmless ? "%c" : "\\x%02X", s[i]);
        s += n ? n : 1;
    }
}

void message_line(const char *text, bool ascii)
{
    message_text(stderr, text, ascii);
    fputc('\n', stderr);
}

void message_error(const char *text, bool ascii)
{
    fputs("ohmen: ", stderr);
    message_line(text, ascii);
}
