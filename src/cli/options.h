/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The options of the tool, one row each. The parser, the help texts, docs/commands.md
 * and the completion of the shell are made from these rows.
 *
 * An option means the same with every command that takes it; which command takes it
 * stands in the command's row (cli/commands.h). */
#ifndef CLI_OPTIONS_H
#define CLI_OPTIONS_H

#include <stdbool.h>

enum option_id {
    OPTION_HELP,
    OPTION_VERSION,
    OPTION_REGISTER,
    OPTION_JSON,
    OPTION_CSV,
    OPTION_HTML,
    OPTION_WIDTH,
    OPTION_ASCII,
    OPTION_COLOUR,
    OPTION_AS_OF,
    OPTION_PERSPECTIVE,
    OPTION_DATE,
    OPTION_SITE,
    OPTION_WHERE,
    OPTION_SORT,
    OPTION_REVERSE,
    OPTION_WHY,
    OPTION_BY,
    OPTION_DRY_RUN,
    OPTION_OBSERVATIONS,
    OPTION_TO,
    OPTION_DEPTH,
    OPTION_SAMPLES,
    OPTION_PRECISION,
    OPTION_SEED,
    OPTION_THREADS,
    OPTION_KERNELS,
    OPTION_X,
    OPTION_Y,
    OPTION_MARKDOWN,
    OPTION_COMPLETION,
    OPTION_COUNT
};

#define OPTION_BIT(id) (1u << (id))

enum option_value {
    VALUE_NONE,
    VALUE_TEXT,
    VALUE_FILE,
    VALUE_FOLDER,
    VALUE_NUMBER, /* low .. high */
    VALUE_WORD    /* one of `words` */
};

enum { REPEATS_MOST = 32 }; /* values of an option that may be repeated */

struct option {
    const char *name; /* without the dashes */
    char letter;      /* the short form, 0: none */
    enum option_value value;
    const char *shown;        /* how help writes the value: "FILE"; NULL for VALUE_NONE */
    unsigned low, high;       /* VALUE_NUMBER */
    const char *const *words; /* VALUE_WORD, NULL-terminated */
    bool repeats;             /* VALUE_TEXT: may be given several times, all count */
    const char *help;
};

extern const struct option options[OPTION_COUNT];

/* The words of --colour by their place in the list. */
enum colour_word { COLOUR_ALWAYS, COLOUR_NEVER, COLOUR_AUTO };

#endif
