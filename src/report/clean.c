/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Texts come from documents, which are checked, but also from the system (names
 * of files and persons), which is not. Invariant: what leaves here is valid
 * UTF-8; what leaves clean_text can be printed. */
#include "report/clean.h"

#include <string.h>

#include "base/text.h"
#include "base/utf8.h"

const char *clean_valid(struct arena *a, const char *s)
{
    if (!s)
        return "";
    size_t n = strlen(s), good = utf8_check(s, n);
    if (good == n)
        return s;
    struct text t;
    text_init(&t, a);
    while (good < n) {
        text_addn(&t, s, good);
        text_add(&t, "\xef\xbf\xbd");
        s += good + 1;
        n -= good + 1;
        good = utf8_check(s, n);
    }
    text_addn(&t, s, n);
    return text_str(&t);
}

const char *clean_text(struct arena *a, const char *s, bool ascii)
{
    return utf8_clean(a, clean_valid(a, s), ascii);
}
