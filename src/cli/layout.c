/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The layout of text. Owns nothing. The encoding is told by the names in the
 * environment alone: setlocale would make results depend on what is installed. */
#include "cli/layout.h"

#include <stdlib.h>
#include <string.h>
#include <strings.h>
#include <sys/ioctl.h>
#include <unistd.h>

enum { WIDTH_LEAST = 60, WIDTH_MOST = 200, WIDTH_ELSE = 100 };

static const char *set_variable(const char *name)
{
    const char *value = getenv(name);
    return value && *value ? value : NULL;
}

static bool names_utf8(const char *value)
{
    for (; *value; value++)
        if (strncasecmp(value, "utf-8", 5) == 0 || strncasecmp(value, "utf8", 4) == 0)
            return true;
    return false;
}

static bool environment_is_utf8(void)
{
    static const char *const names[] = {"LC_ALL", "LC_CTYPE", "LANG"};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        const char *value = set_variable(names[i]);
        if (value)
            return names_utf8(value);
    }
    return false;
}

/* The columns of the terminal, 0 where nothing tells. */
static unsigned long terminal_columns(void)
{
    const char *columns = set_variable("COLUMNS");
    char *end = NULL;
    unsigned long n = columns ? strtoul(columns, &end, 10) : 0;
    if (columns && columns[0] >= '0' && columns[0] <= '9' && *end == 0 && n > 0)
        return n;
    struct winsize size;
    return ioctl(STDOUT_FILENO, TIOCGWINSZ, &size) == 0 ? size.ws_col : 0;
}

static unsigned width(const struct args *args, bool terminal)
{
    if (args->given[OPTION_WIDTH])
        return args->number[OPTION_WIDTH];
    unsigned long n = terminal ? terminal_columns() : 0;
    if (n == 0)
        return WIDTH_ELSE;
    return n < WIDTH_LEAST ? WIDTH_LEAST : n > WIDTH_MOST ? WIDTH_MOST : (unsigned)n;
}

static bool colour(const struct args *args, bool terminal)
{
    unsigned word = args->given[OPTION_COLOUR] ? args->number[OPTION_COLOUR] : COLOUR_AUTO;
    if (word == COLOUR_AUTO)
        return terminal && !set_variable("NO_COLOR");
    return word == COLOUR_ALWAYS;
}

ohmen_layout layout_choose(const struct args *args)
{
    bool terminal = isatty(STDOUT_FILENO) == 1;
    ohmen_layout layout = ohmen_layout_defaults();
    layout.width = width(args, terminal);
    layout.ascii = args->given[OPTION_ASCII] || !environment_is_utf8();
    layout.colour = colour(args, terminal);
    return layout;
}
