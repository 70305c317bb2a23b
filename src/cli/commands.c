/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The table of commands. Owns the rows. Help, docs/commands.md and completion are made
 * from them. Invariant: rows stand in the order of their jobs, and the examples, run in
 * this order in one folder, work (the docs suite runs them). */
#include "cli/commands.h"

#include <string.h>

const char *const command_jobs[JOB_COUNT] = {
    [JOB_KEEP] = "Keep the register", [JOB_RISK] = "See the risk",
    [JOB_DECIDE] = "Decide",          [JOB_PROVE] = "Prove",
    [JOB_LOOK_UP] = "Look up",
};

#define FORM                                                                                       \
    (OPTION_BIT(OPTION_JSON) | OPTION_BIT(OPTION_CSV) | OPTION_BIT(OPTION_HTML) |                  \
     OPTION_BIT(OPTION_WIDTH) | OPTION_BIT(OPTION_ASCII) | OPTION_BIT(OPTION_COLOUR))
#define ON_REGISTER OPTION_BIT(OPTION_REGISTER)
#define WHEN_AND_WHOSE                                                                             \
    (OPTION_BIT(OPTION_AS_OF) | OPTION_BIT(OPTION_PERSPECTIVE) | OPTION_BIT(OPTION_DATE))
#define READING (ON_REGISTER | FORM | WHEN_AND_WHOSE)
#define CHOOSING (OPTION_BIT(OPTION_WHERE) | OPTION_BIT(OPTION_SORT) | OPTION_BIT(OPTION_REVERSE))
#define READING_HAZARDS (READING | OPTION_BIT(OPTION_SITE))
#define SAMPLING                                                                                   \
    (OPTION_BIT(OPTION_SAMPLES) | OPTION_BIT(OPTION_PRECISION) | OPTION_BIT(OPTION_SEED) |         \
     OPTION_BIT(OPTION_THREADS) | OPTION_BIT(OPTION_KERNELS))

const struct command commands[] = {
    {"new",
     JOB_KEEP,
     {"FILE", 0, 1, "the register to create, such as skerry.ohmen", true},
     .options = ON_REGISTER,
     .brief = "create an empty register",
     .text = "Creates an empty register. A file that exists is never touched. The name is the "
             "operand, or that of -r or OHMEN_REGISTER.",
     .example = "ohmen new skerry.ohmen",
     .run = command_new},
    {"import",
     JOB_KEEP,
     {"FILE", 1, OPERANDS_ANY,
      "documents (*.yaml, *.yml, or - for standard input) and lists of observations (*.csv)", true},
     .options = ON_REGISTER | FORM | OPTION_BIT(OPTION_WHY) | OPTION_BIT(OPTION_BY) |
                OPTION_BIT(OPTION_DRY_RUN),
     .needs = OPTION_BIT(OPTION_WHY),
     .brief = "store documents and observations, as one entry of the journal",
     .text = "Reads all files, checks the register that would result, and stores the changes as "
             "one entry of the journal, or nothing. The report lists what was added, changed field "
             "by field, and removed. The same files imported twice change nothing.\n"
             "Mistakes are printed on standard error, one a line, as FILE:LINE:COLUMN: sentence, "
             "those of all files in one run; with --json they are also in the report on standard "
             "output. --why is needed unless --dry-run is given.",
     .example = "ohmen -r skerry.ohmen import samples/skerry/* --why \"First survey\"",
     .run = command_import},
    {"export",
     JOB_KEEP,
     {0},
     .options = ON_REGISTER | OPTION_BIT(OPTION_AS_OF) | OPTION_BIT(OPTION_OBSERVATIONS) |
                OPTION_BIT(OPTION_TO),
     .brief = "write the register as documents",
     .text = "Prints all objects as one YAML document, or all observations as CSV, or writes both "
             "into a folder. Imported into an empty register they give the same content.",
     .example = "ohmen -r skerry.ohmen export --to skerry-documents",
     .run = command_export},
    {"backup",
     JOB_KEEP,
     {"FILE", 1, 1, "the copy to make; a file that exists is refused", true},
     .options = ON_REGISTER,
     .brief = "copy the register while it is in use",
     .text = "Makes a copy of the register that is whole even while others write to it. A plain "
             "copy of the file is not safe then.",
     .example = "ohmen -r skerry.ohmen backup skerry-2026-12-01.ohmen",
     .run = command_backup},
    {"gaps",
     JOB_KEEP,
     {0},
     .options = READING_HAZARDS,
     .brief = "what is missing: owners, sources, reviews, tests",
     .text =
         "Prints each object that lacks something by which a register is kept alive: hazards, "
         "decisions and options without an owner, hazards and decisions whose review has no "
         "date or is overdue on the day of evaluation (--date), hazards without a status, or "
         "being treated without a treatment, numbers without a source, sources that nobody has "
         "looked up, elements whose failures nothing shows, and groups of people whom no hazard "
         "harms. The report counts them in a chapter.",
     .example = "ohmen -r skerry.ohmen gaps",
     .run = command_gaps},
    {"hazards",
     JOB_RISK,
     {0},
     .options = READING_HAZARDS | CHOOSING,
     .brief = "each hazard: frequency, damage, risk, rank",
     .text = "Prints each hazard with its frequency, the frequency of outcomes with damage, the "
             "mean damage, the risk (frequency times damage, in money per year) and its rank. "
             "Conditions (--where) choose among them and leave the ranks as they are.",
     .example = "ohmen -r skerry.ohmen hazards",
     .run = command_hazards},
    {"protection",
     JOB_RISK,
     {0},
     .options = READING_HAZARDS,
     .brief = "what protection hinges on: weak points and tests",
     .text = "Prints which elements carry most of the risk, of which one alone leaves a fault "
             "uncleared, breakers that no breaker failure protection backs up, overdue tests and "
             "what no test shows, what a fault itself puts out of action, unwanted operation, and "
             "common causes. It is a chapter of the report.",
     .example = "ohmen -r skerry.ohmen protection --width 80",
     .run = command_protection},
    {"supply",
     JOB_RISK,
     {0},
     .options = READING_HAZARDS,
     .brief = "interruptions of supply: indices, hazards, sites",
     .text = "Prints the indices of interruption (SAIFI, SAIDI, CAIDI, ASAI, MAIFI after IEEE "
             "1366, and the energy not supplied), the hazards that interrupt most, and the risk "
             "and the interruptions at each site. With --site it prints what that site "
             "contributes. It is a chapter of the report.",
     .example = "ohmen -r skerry.ohmen supply --width 80",
     .run = command_supply},
    {"people",
     JOB_RISK,
     {0},
     .options = READING,
     .brief = "harm to people: individual risk of each group",
     .text = "Prints for each group of people the probability per year that a given person of it "
             "dies, over all hazards, as a mean over the horizon and in the highest year, with its "
             "place among the criteria for people, and the outcomes that it comes from. It is a "
             "chapter of the report.",
     .example = "ohmen -r skerry.ohmen people --width 80",
     .run = command_people},
    {"damage",
     JOB_RISK,
     {"DECISION", 0, 1, "each of its alternatives; the register as it is if left out"},
     .options = READING | OPTION_BIT(OPTION_SEED) | OPTION_BIT(OPTION_THREADS) |
                OPTION_BIT(OPTION_KERNELS),
     .brief = "how bad it may get: damage over the horizon",
     .text = "Prints what all damage over the horizon may add up to, for the register as it is or "
             "for each alternative of a decision: the probability of none, the mean, the damage "
             "that is exceeded with 10, 5 and 1 %, the mean of the worst 5 and 1 %, and the "
             "probability that an amount is exceeded as a curve. Damage is summed, not "
             "discounted. It is a chapter of the report, and a part of a weighing and a memo.",
     .example = "ohmen -r skerry.ohmen damage --width 80",
     .run = command_damage},
    {"list",
     JOB_RISK,
     {"KIND", 1, 1, "a section of the documents, such as elements, schemes, hazards or options"},
     .options = READING_HAZARDS | CHOOSING,
     .brief = "everything of one kind, as a table",
     .text = "Prints the objects of one kind as a table. The kind is named as its section in the "
             "documents is. Conditions choose among them, and a field orders them: ohmen list "
             "hazards --where \"review<2027-06-30\" --where status=open --sort review. A date of "
             "review that has passed on the day of evaluation is marked as overdue.",
     .example = "ohmen -r skerry.ohmen list elements",
     .run = command_list},
    {"show",
     JOB_RISK,
     {"ID", 1, 1, "the object, such as H-VH-BUS1"},
     .options = READING,
     .brief = "one object with all that it says",
     .text = "Prints one object of any kind: a hazard with the numbers of its event tree, what "
             "its risk hinges on and its minimal cut sets; an element with what it fails of, over "
             "time, and where that matters; a scheme with its structure and where it is called "
             "on.",
     .example = "ohmen -r skerry.ohmen show H-VH-BUS1",
     .run = command_show},
    {"grid",
     JOB_RISK,
     {"DECISION", 0, 1, "show its options as arrows; all hazards as they are if left out"},
     .options = READING_HAZARDS,
     .brief = "the grid of frequency and damage",
     .text = "Draws the grid: logarithm of the frequency upwards, logarithm of the damage to the "
             "right, lines of equal risk falling from left to right, one mark a hazard. For a "
             "decision, arrows show where its options move the marks.",
     .example = "ohmen -r skerry.ohmen grid",
     .run = command_grid},
    {"report",
     JOB_RISK,
     {0},
     .options = READING_HAZARDS | SAMPLING,
     .brief = "the whole register as one document",
     .text =
         "Prints the whole register as one document. What its figures may be is sampled over all "
         "that is unknown.",
     .example = "ohmen -r skerry.ohmen report --width 80",
     .run = command_report},
    {"weigh",
     JOB_DECIDE,
     {"DECISION", 1, 1, "the decision, such as D-VH-BUS"},
     .options = READING | SAMPLING,
     .brief = "the options of a decision against doing nothing",
     .text =
         "Weighs the options of a decision, and their combinations, against doing nothing, "
         "over every hazard that one of them reaches, and tells in how much of what is possible "
         "each of them is best. Of a decision in several stages it draws the tree, or says in "
         "which condition and year to act, what to do after each reading, what a reading is "
         "worth against its price, and what each alternative may come to.",
     .example = "ohmen -r skerry.ohmen weigh D-VH-BUS",
     .run = command_weigh},
    {"sensitivity",
     JOB_DECIDE,
     {"DECISION", 1, 1, "the decision, such as D-VH-DARK"},
     .options = READING | SAMPLING | OPTION_BIT(OPTION_X) | OPTION_BIT(OPTION_Y),
     .brief = "how sure the answer is, and what it depends on",
     .text = "Prints in how much of what is possible each alternative of a decision is best, what "
             "it costs on average to decide now rather than knowing everything, what each "
             "unknown input swings, a map of the best alternative by two inputs (--x, --y), the "
             "inputs that the answer moves with, elasticities, and what would turn it.",
     .example = "ohmen -r skerry.ohmen sensitivity D-VH-DARK --width 80",
     .run = command_sensitivity},
    {"memo",
     JOB_DECIDE,
     {"DECISION", 1, 1, "the decision, such as D-TQ"},
     .options = READING | SAMPLING,
     .brief = "one decision as a document to be signed",
     .text = "Prints what is asked, what is recommended, what it costs, what it avoids and for "
             "whom, how often it ends badly, how sure that is, what it rests on with its sources, "
             "what would turn it, what is not covered, and who signs.",
     .example = "ohmen -r skerry.ohmen memo D-TQ --width 80",
     .run = command_memo},
    {"test-interval",
     JOB_DECIDE,
     {"ELEMENT", 1, 1, "an element with a routine test, such as VH-GAS2"},
     .options = READING,
     .brief = "how often to test an element, by cost",
     .text = "Finds the interval between routine tests that costs least, tests and the risk of "
             "all hazards together, and shows what the others cost. Intervals are round ones, "
             "from an eighth of the present one to 32 times it; risks are averages over "
             "whole cycles of tests.\n"
             "What one of them is made of: ohmen explain \"HAZARD.risk@[ELEMENT.test.every=2 a, "
             "whole cycles]\".",
     .example = "ohmen -r skerry.ohmen test-interval VH-GAS2",
     .run = command_test_interval},
    {"explain",
     JOB_PROVE,
     {"FIGURE", 1, 1, "the name of a figure, such as H-VH-BUS1.risk"},
     .options = READING | SAMPLING | OPTION_BIT(OPTION_DEPTH),
     .brief = "the derivation of a figure, down to its sources",
     .text =
         "Takes one figure apart, formula by formula, down to inputs with their sources. "
         "Figures carry their names in the output of --json.\n"
         "A point behind the name, as H-VH-BUS1.risk[p95], asks for what the figure may be: the "
         "value below which it is with a probability of 95 % (p5, p50 and p95), by a sample over "
         "all that is unknown, and the unknown inputs that the figure moves with.",
     .example = "ohmen -r skerry.ohmen explain H-VH-BUS1.risk --depth 2",
     .run = command_explain},
    {"history",
     JOB_PROVE,
     {"ID", 0, 1, "an object; the whole journal if left out"},
     .options = ON_REGISTER | FORM,
     .brief = "the journal: who changed what, when and why",
     .text = "Prints the entries of the journal, or each version of one object, field by field.",
     .example = "ohmen -r skerry.ohmen history H-VH-BUS1",
     .run = command_history},
    {"verify",
     JOB_PROVE,
     {0},
     .options = ON_REGISTER | FORM,
     .brief = "prove that nothing was altered or lost",
     .text = "Computes all hashes of the register again, follows the chain of the journal, and "
             "compares the derived tables with what they are derived from. Whatever is wrong is "
             "reported, and the exit status is 5.",
     .example = "ohmen -r skerry.ohmen verify",
     .run = command_verify},
    {"schema",
     JOB_LOOK_UP,
     {0},
     .brief = "the JSON Schema of the documents",
     .text = "Prints the JSON Schema of the documents, for editors that check while one types.",
     .example = "ohmen schema",
     .run = command_schema},
    {"help",
     JOB_LOOK_UP,
     {"COMMAND", 0, 1, "a command; a list of all if left out"},
     .options = OPTION_BIT(OPTION_MARKDOWN) | OPTION_BIT(OPTION_COMPLETION),
     .brief = "this list, or the help text of a command",
     .text = "Prints the list of commands, the help text of one, the whole manual as Markdown, or "
             "the completion for bash.",
     .example = "ohmen help weigh",
     .run = command_help},
};

const unsigned n_commands = sizeof commands / sizeof commands[0];

const struct command *command_named(const char *name)
{
    for (unsigned i = 0; i < n_commands; i++)
        if (strcmp(commands[i].name, name) == 0)
            return &commands[i];
    return NULL;
}

bool command_takes(const struct command *c, enum option_id id)
{
    if (id == OPTION_HELP)
        return true;
    if (!c)
        return id == OPTION_VERSION || id == OPTION_REGISTER;
    return (c->options & OPTION_BIT(id)) != 0;
}
