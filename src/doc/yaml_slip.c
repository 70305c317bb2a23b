/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Slips in YAML texts. The commonest are recognised by a look at the lines
 * around the place where the parser gave up; the others get a sentence from a
 * table that is keyed by the parser's words (libyaml 0.2: scanner.c, parser.c).
 *
 * Owns nothing. Invariant: exactly one diagnostic for a slip. */
#include "doc/yaml_slip.h"

#include <string.h>

#include "base/utf8.h"
#include "doc/yaml.h"

/* The parser takes no longer word for a key that stands on the line of its value. */
enum { LONGEST_KEY = 1024 };

struct look {
    struct arena *a;
    struct source *s;
    const struct slip *slip;
    struct diags *d;
    const char *line;   /* where the parser gave up */
    const char *before; /* this line up to there */
    char here;          /* the character there, 0 at the line's end */
};

static bool is_word(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
           c == '-' || c == '_' || (unsigned char)c >= 0x80;
}

static bool is_blank(char c)
{
    return c == ' ' || c == '\t';
}

bool slip_lacks_blank(const char *text)
{
    const char *p = text;
    if (!is_word(*p) || (*p >= '0' && *p <= '9'))
        return false;
    while (is_word(*p))
        p++;
    return p[0] == ':' && p[1] != 0 && !is_blank(p[1]) && p[1] != '/' && p[1] != ':';
}

void slip_report_blank(struct arena *a, struct diags *d, struct place at, const char *text)
{
    const char *colon = strchr(text, ':');
    const char *word = arena_strn(a, text, strcspn(text, " \t"));
    diag_add(d, at,
             "a blank is missing behind the colon of %s: write '%.*s: ...', or quote the text if "
             "it is meant as one value",
             source_quote(a, word), (int)(colon - text), text);
}

static const char *skip_blanks(const char *s)
{
    while (is_blank(*s))
        s++;
    return s;
}

/* Skips blanks and the marks of list items. */
static const char *content(const char *line)
{
    const char *p = skip_blanks(line);
    while (p[0] == '-' && is_blank(p[1]))
        p = skip_blanks(p + 1);
    return p;
}

/* The colon and blank behind the first key of the line, or NULL. */
static const char *first_colon(const char *line)
{
    const char *p = content(line);
    for (; *p && !(*p == '#' && (p == line || is_blank(p[-1]))); p++)
        if (*p == ':' && (is_blank(p[1]) || p[1] == 0))
            return p;
    return NULL;
}

static struct place at_spot(const struct look *l, size_t line, size_t column)
{
    return source_place(l->s, (struct spot){line, column});
}

static struct place gave_up(const struct look *l)
{
    return source_place(l->s, l->slip->at);
}

/* A tab among the blanks that begin a line: editors hide it, YAML forbids it. */
static bool tab_indents(const struct look *l, size_t line)
{
    const char *text = source_line(l->a, l->s, line);
    size_t blanks = strspn(text, " \t");
    const char *tab = memchr(text, '\t', blanks);
    if (!tab || !text[blanks])
        return false;
    diag_add(l->d, at_spot(l, line, (size_t)(tab - text)),
             "a tab stands in the indentation: indent with blanks, two for each level");
    return true;
}

static bool find_tab(const struct look *l)
{
    size_t line = l->slip->at.line, above = source_line_above(l->s, line);
    return tab_indents(l, line) || (above != SIZE_MAX && tab_indents(l, above));
}

/* name:Relay on this line. */
static bool lacks_blank(const struct look *l, size_t line)
{
    const char *text = source_line(l->a, l->s, line), *p = content(text);
    if (first_colon(text) || !slip_lacks_blank(p))
        return false;
    slip_report_blank(l->a, l->d, at_spot(l, line, (size_t)(p - text)), p);
    return true;
}

/* A line of a map that holds no key with a colon. */
static void report_no_colon(const struct look *l, size_t line)
{
    const char *text = source_line(l->a, l->s, line), *p = content(text);
    diag_add(l->d, at_spot(l, line, utf8_count(text, (size_t)(p - text))),
             "'key: value' was expected, but %s has no colon", source_quote(l->a, p));
}

static void report_long_key(const struct look *l, size_t line)
{
    diag_add(l->d, at_spot(l, line, 0), "the key in this line is too long: it may have at most "
                                        "%d bytes", YAML_KEY_BYTES);
}

/* The parser met a second colon, or a key where a value goes on. */
static void explain_colon(const struct look *l)
{
    size_t line = l->slip->at.line, above = source_line_above(l->s, line);
    const char *first = first_colon(l->line), *begin = content(l->line);
    if (above != SIZE_MAX && lacks_blank(l, above))
        return;
    if (first && (size_t)(first - l->line) < strlen(l->before))
        diag_add(l->d, gave_up(l),
                 "a value must not hold a colon followed by a blank: put the whole value behind "
                 "%s in quotes",
                 source_quote(l->a, arena_strn(l->a, begin, (size_t)(first - begin) + 1)));
    else if (strlen(l->before) > LONGEST_KEY)
        report_long_key(l, line);
    else if (above != SIZE_MAX && !first_colon(source_line(l->a, l->s, above)))
        report_no_colon(l, above);
    else
        diag_add(l->d, at_spot(l, line, (size_t)(begin - l->line)),
                 "this line is indented deeper than the line above, which already has a value: "
                 "begin it in the column of the keys it belongs to");
}

static void explain_no_colon(const struct look *l)
{
    size_t line = l->slip->opened.line;
    if (lacks_blank(l, line))
        return;
    if (strlen(source_line(l->a, l->s, line)) > LONGEST_KEY)
        report_long_key(l, line);
    else
        report_no_colon(l, line);
}

/* Something stands behind the end of a quoted text or a bracket on this line. */
static bool follows_end(const struct look *l)
{
    size_t n = strlen(l->before);
    while (n > 0 && is_blank(l->before[n - 1]))
        n--;
    if (n == 0 || !strchr("\"'}]", l->before[n - 1]))
        return false;
    bool quote = l->before[n - 1] == '"' || l->before[n - 1] == '\'';
    const char *hint = quote ? "quote the whole value (a single quote inside single quotes is "
                               "written twice)"
                             : "end the line there, or quote the whole value";
    diag_add(l->d, gave_up(l), "text follows the closing %c on the same line: %s",
             l->before[n - 1], hint);
    return true;
}

/* The line fits no level above; `opened` and the line above are the nearest. */
static void report_levels(const struct look *l, size_t above)
{
    struct spot from = l->slip->opened;
    size_t column = strspn(source_line(l->a, l->s, above), " ");
    if (column == from.column)
        diag_add(l->d, gave_up(l),
                 "this line fits no line above: begin it in column %zu, where line %zu begins",
                 column + 1, above + 1);
    else
        diag_add(l->d, gave_up(l),
                 "this line fits no line above: begin it in column %zu, where line %zu begins, or "
                 "in column %zu, as line %zu",
                 from.column + 1, from.line + 1, column + 1, above + 1);
}

static void explain_indentation(const struct look *l)
{
    size_t above = source_line_above(l->s, l->slip->at.line);
    bool item = strstr(l->slip->problem, "'-'") != NULL;
    if (follows_end(l))
        return;
    if (l->here == ':')
        diag_add(l->d, gave_up(l), "a key is missing before the colon");
    else if (l->here == '}' || l->here == ']')
        diag_add(l->d, gave_up(l), "this %c closes nothing that is open", l->here);
    else if (*content(l->before))
        diag_add(l->d, gave_up(l), "this does not go with what stands before it in the line: put "
                                   "the whole value in quotes");
    else if (above == SIZE_MAX)
        diag_add(l->d, gave_up(l), "'key: value' was expected here");
    else if (strspn(source_line(l->a, l->s, above), " ") != l->slip->at.column)
        report_levels(l, above);
    else if (item)
        diag_add(l->d, gave_up(l), "a list item, which begins with '- ', was expected here");
    else
        diag_add(l->d, gave_up(l),
                 "'key: value' was expected here: a map and a list do not mix");
}

/* Brackets: a missing comma, a colon inside a value, or never closed. */
static void explain_bracket(const struct look *l)
{
    struct spot from = l->slip->opened;
    bool map = strstr(l->slip->problem, "'}'") != NULL;
    const char *first = first_colon(l->line);
    bool same_line = from.line == l->slip->at.line;
    bool first_on_line = first && first == l->line + strlen(l->before);
    if (l->here == ':' && (same_line || !first_on_line)) {
        diag_add(l->d, gave_up(l),
                 "a colon stands inside a value, or a comma is missing before its key: in %s "
                 "write 'key: value, key: value', and quote a value that holds a colon",
                 map ? "{ }" : "[ ]");
        return;
    }
    if (same_line && l->here) {
        diag_add(l->d, gave_up(l), "a comma or %c was expected here, behind the %c of column %zu",
                 map ? '}' : ']', map ? '{' : '[', from.column + 1);
        return;
    }
    diag_add(l->d, source_place(l->s, from),
             "the %c opened here is not closed, or a comma is missing before line %zu",
             map ? '{' : '[', l->slip->at.line + 1);
}

static void explain_quote(const struct look *l)
{
    size_t offset = source_offset(l->s, l->slip->opened);
    char quote = offset < l->s->n ? l->s->text[offset] : '"';
    diag_add(l->d, source_place(l->s, l->slip->opened),
             "the quote opened here is never closed: expected another %c", quote);
}

static void explain_start(const struct look *l)
{
    if (l->here == '\t') {
        diag_add(l->d, gave_up(l), "a tab stands here: use blanks");
        return;
    }
    const char *text = source_quote(l->a, l->line + strlen(l->before));
    diag_add(l->d, gave_up(l), "a value cannot begin with %c: put %s in quotes", l->here, text);
}

static void explain_content(const struct look *l)
{
    if (l->here)
        diag_add(l->d, gave_up(l), "a value was expected, but %c stands here: quote a value that "
                                   "begins with it", l->here);
    else
        diag_add(l->d, gave_up(l), "a value was expected here");
}

static void explain_item(const struct look *l)
{
    diag_add(l->d, gave_up(l),
             "a list item cannot begin here: put '- ' on a line of its own below the key, or write "
             "the list as [a, b]");
}

struct explanation {
    const char *problem; /* a part of the parser's words */
    void (*explain)(const struct look *l);
    const char *text; /* where explain is NULL */
};

/* In this order: the first that fits. */
static const struct explanation explanations[] = {
    {"mapping values are not allowed", explain_colon, NULL},
    {"could not find expected ':'", explain_no_colon, NULL},
    {"cannot start any token", explain_start, NULL},
    {"did not find expected key", explain_indentation, NULL},
    {"did not find expected '-' indicator", explain_indentation, NULL},
    {"expected ',' or", explain_bracket, NULL},
    {"found unexpected end of stream", explain_quote, NULL},
    {"found unexpected document indicator", explain_quote, NULL},
    {"block sequence entries are not allowed", explain_item, NULL},
    {"mapping keys are not allowed", NULL,
     "'? ' cannot begin a key here: write 'key: value', or quote the text"},
    {"did not find expected alphabetic or numeric", NULL,
     "a value that begins with * or & must stand in quotes"},
    {"unknown escape character", NULL,
     "this backslash escape is unknown: inside double quotes write \\\\ for a backslash, or use "
     "single quotes"},
    {"hexdecimal number", NULL, "hexadecimal digits are missing in this backslash escape"},
    {"invalid Unicode character escape", NULL, "this backslash escape is no Unicode character"},
    {"did not find expected node content", explain_content, NULL},
    {"did not find expected <document start>", NULL,
     "text follows the end of the document: a file holds one document without '---' or '...'"},
    {"comment or line break", NULL,
     "after | or > the text must begin on the next line, indented deeper than the key"},
    {"indentation indicator equal to 0", NULL,
     "the indentation behind | or > must be a digit from 1 to 9"},
    {"leading space", NULL,
     "the blank lines that begin this text are indented deeper than its first line"},
    {"incompatible YAML document", NULL, "this version of YAML is not known: leave the line out"},
    {"directive", NULL, "lines that begin with % are not used here: leave the line out, or quote "
                        "the value"},
    {"tag", NULL, "tags (words that begin with !) are not used here: quote the value"},
    {"URI", NULL, "tags (words that begin with !) are not used here: quote the value"},
};

void slip_report(struct arena *a, struct source *s, const struct slip *slip, struct diags *d)
{
    struct look l = {.a = a, .s = s, .slip = slip, .d = d};
    l.line = source_line(a, s, slip->at.line);
    size_t start = source_offset(s, (struct spot){slip->at.line, 0});
    size_t before = source_offset(s, slip->at) - start;
    l.before = arena_strn(a, l.line, before);
    l.here = l.line[before];
    if (!strstr(slip->problem, "end of stream") && find_tab(&l))
        return;
    for (size_t i = 0; i < sizeof explanations / sizeof explanations[0]; i++) {
        const struct explanation *x = &explanations[i];
        if (!strstr(slip->problem, x->problem))
            continue;
        if (x->explain)
            x->explain(&l);
        else
            diag_add(d, gave_up(&l), "%s", x->text);
        return;
    }
    diag_add(d, gave_up(&l), "the text cannot be read as YAML from here on (%s)", slip->problem);
}
