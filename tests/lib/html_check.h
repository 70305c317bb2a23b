/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A strict reader of the HTML that a report may be, for tests, apart from the product's
 * writer: a small part of HTML5, balanced, with nothing that runs or fetches. */
#ifndef TESTS_HTML_CHECK_H
#define TESTS_HTML_CHECK_H

#include <stdbool.h>
#include <stddef.h>

/* NULL when the n bytes are such a page, else what is wrong first, and *bad (may be NULL)
 * is the offset of it. A page begins with <!DOCTYPE html>; elements are closed in order, but
 * meta and input, or end in "/>"; names are of a known list; attributes are name="value",
 * none twice in an element, none beginning with "on", no style and no src; < > & " ' stand in
 * texts and values only as &lt; &gt; &amp; &quot; &#39; (an apostrophe nowhere else, a quote
 * in texts nowhere else); no control character but the line end; valid UTF-8; ids are
 * unique; href, for and aria-labelledby and -describedby name an id of the page; <title>,
 * <main>, <style> and <body> stand once. The style holds no url( and no @import. No text or
 * value is longer than the page. */
const char *html_check(const char *s, size_t n, size_t *bad);

/* The words of a page that html_check accepts, without <head> and pictures (<svg>): tags
 * within a line (span, bdi, b) vanish, others part words with a blank, entities are read.
 * `out` has room for n + 1 bytes. */
void html_words(const char *s, size_t n, char *out);

#endif
