/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The table of options. Owns the rows and nothing else; what an option does is
 * decided where its value is read (layout.c, report.c, the commands). Invariant: one
 * row for each option_id, in their order, which is also the order of help texts. */
#include "cli/options.h"

static const char *const colour_words[] = {"always", "never", "auto", 0};

static const char *const kernel_words[] = {"plain", "wide", "widest", 0};

const struct option options[OPTION_COUNT] = {
    [OPTION_HELP] = {"help", 'h', .help = "print the help text of the tool or of a command"},
    [OPTION_VERSION] = {"version", .help = "print the version"},
    [OPTION_REGISTER] = {"register", 'r', VALUE_FILE, "FILE",
                         .help = "the register; else the environment variable OHMEN_REGISTER, else "
                                 "the only *.ohmen file in the current folder"},
    [OPTION_JSON] = {"json", .help = "print the report as one JSON object"},
    [OPTION_CSV] = {"csv", .help = "print the tables of the report as CSV"},
    [OPTION_HTML] = {"html", .help = "print the report as one page of HTML, for a browser or "
                                     "for paper, with grids and curves as pictures"},
    [OPTION_WIDTH] = {"width", 0, VALUE_NUMBER, "N", 60, 200,
                      .help = "columns of the text; else the width of the terminal (or COLUMNS, "
                              "where that is set), at least 60 and at most 200; else 100"},
    [OPTION_ASCII] = {"ascii", .help = "print ASCII only; chosen without this option too where "
                                       "LC_ALL, LC_CTYPE or LANG (the first one that is set) "
                                       "does not name UTF-8"},
    [OPTION_COLOUR] = {"colour", 0, VALUE_WORD, "WHEN", .words = colour_words,
                       .help = "colour the text: always, never, or auto, which is on a terminal "
                               "unless NO_COLOR is set; auto if left out"},
    [OPTION_AS_OF] = {"as-of", 0, VALUE_TEXT, "ENTRY|DATE",
                      .help = "what the journal knew at an entry (its number), at the end of a "
                              "day (2026-04-14) or at a second (2026-04-14T10:11:12Z), UTC"},
    [OPTION_PERSPECTIVE] = {"perspective", 0, VALUE_TEXT, "NAME",
                            .help = "whose damage counts: a perspective of the register, or all "
                                    "for every category; else the register's own choice"},
    [OPTION_DATE] = {"date", 0, VALUE_TEXT, "DATE",
                     .help = "the day of evaluation, such as 2027-06-30, until which exposure "
                             "accrues; else today (UTC). It changes nothing of what the journal "
                             "knew: see --as-of"},
    [OPTION_SITE] = {"site", 0, VALUE_TEXT, "ID",
                     .help = "only the hazards (of a list: the objects) at this site and at the "
                             "sites in it"},
    [OPTION_WHERE] =
        {"where", 0, VALUE_TEXT, "CONDITION", .repeats = true,
         .help = "only what fulfils the condition, and all of them where it is given "
                 "several times: FIELD=TEXT, FIELD!=TEXT (or not given), FIELD~TEXT "
                 "(contains), "
                 "for dates, counts and quantities also with <, <=, > and >=, "
                 "FIELD= (not given) and FIELD!= (given). FIELD is a field of the "
                 "documents (owner, test/every), id or name; with the command "
                 "hazards also a column: rank, frequency, damaging, damage, risk, criterion. "
                 "Case does not matter, a site includes the sites in it"},
    [OPTION_SORT] = {"sort", 0, VALUE_TEXT, "FIELD",
                     .help = "in the order of a field: numbers and dates by value, quantities by "
                             "their mean, texts by their letters; what does not have it comes "
                             "last"},
    [OPTION_REVERSE] = {"reverse", .help = "in falling order; goes with --sort"},
    [OPTION_WHY] = {"why", 0, VALUE_TEXT, "TEXT",
                    .help = "the reason of the change, kept in the journal"},
    [OPTION_BY] = {"by", 0, VALUE_TEXT, "TEXT",
                   .help = "whose change it is, kept in the journal; else the environment "
                           "variable OHMEN_AUTHOR, else the login name"},
    [OPTION_DRY_RUN] = {"dry-run", .help = "say what would change and store nothing"},
    [OPTION_OBSERVATIONS] = {"observations",
                             .help = "the observations as CSV instead of the objects as YAML"},
    [OPTION_TO] = {"to", 0, VALUE_FOLDER, "DIR",
                   .help = "write register.yaml and observations.csv into this folder, which is "
                           "made if there is none; both files, or neither"},
    [OPTION_DEPTH] = {"depth", 0, VALUE_NUMBER, "N", 1, 1000,
                      .help = "go down N levels; all levels if left out"},
    [OPTION_SAMPLES] = {"samples", 0, VALUE_NUMBER, "N", 256, 1048576,
                        .help = "values of each figure that are drawn over all that is unknown, "
                                "rounded up to a power of 2; 512 if left out (with --precision: "
                                "65536 at the most)"},
    [OPTION_PRECISION] = {"precision", 0, VALUE_TEXT, "PART",
                          .help = "draw samples until the standard errors of the mean worths are "
                                  "at most this part of the greatest of them, such as '0.5 %'"},
    [OPTION_SEED] = {"seed", 0, VALUE_NUMBER, "N", 1, 4294967295,
                     .help = "another seed, other samples; 1 if left out. The same seed gives the "
                             "same figures"},
    [OPTION_THREADS] = {"threads", 0, VALUE_NUMBER, "N", 1, 64,
                        .help = "threads that samples are computed on; one for each processor if "
                                "left out. The figures are the same for any number"},
    [OPTION_KERNELS] = {"kernels", 0, VALUE_WORD, "SET", .words = kernel_words,
                        .help = "instructions to compute samples with: plain, wide (AVX2) or "
                                "widest (AVX-512); the last that the processor has if left out. "
                                "The figures are the same for all"},
    [OPTION_X] = {"x", 0, VALUE_TEXT, "INPUT",
                  .help =
                      "the input that the map shows from left to right, by the name of its "
                      "figure, such as lost-load.value; one of the two with the widest swings if "
                      "left out"},
    [OPTION_Y] = {"y", 0, VALUE_TEXT, "INPUT", .help = "the input that the map shows upwards"},
    [OPTION_MARKDOWN] = {"markdown", .help = "print docs/commands.md"},
    [OPTION_COMPLETION] = {"completion", .help = "print the completion for bash; use it by: "
                                                 "source <(ohmen help --completion)"},
};
