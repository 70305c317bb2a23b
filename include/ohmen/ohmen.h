/* SPDX-License-Identifier: GPL-3.0-or-later */
/* libohmen: a risk register for the protection of electrical networks.
 *
 * A *register* is one file. Documents (YAML, CSV) are imported into it, each import
 * one entry of its journal. From what it holds, as of any entry, reports are computed:
 * hazards with their frequency, outcomes, damage and risk; decisions with their
 * options weighed against doing nothing; the grid of frequency and damage; and the
 * derivation of any single figure. A report is made of neutral blocks and is written
 * as text, JSON, CSV or HTML.
 *
 *     #include <ohmen/ohmen.h>
 *
 *     ohmen_error error = OHMEN_ERROR_INIT;
 *     ohmen_register *reg = NULL;
 *     ohmen_report *report = NULL;
 *     ohmen_query query = ohmen_query_defaults();
 *
 *     if (ohmen_open("harbour.ohmen", OHMEN_READ, &reg, &error) == OHMEN_OK &&
 *         ohmen_hazards(reg, &query, &report, &error) == OHMEN_OK) {
 *         ohmen_layout layout = ohmen_layout_defaults();
 *         fputs(ohmen_report_text(report, &layout), stdout);
 *     } else {
 *         fprintf(stderr, "%s\n", error.text);
 *     }
 *     ohmen_report_free(report);
 *     ohmen_close(reg);
 *
 * The library never prints, never exits, reads no environment but the clock seam
 * (OHMEN_CLOCK), and never calls setlocale. A register handle belongs to one thread at
 * a time; different handles are independent. Texts are UTF-8. Texts and reports are
 * valid until their owner is freed. All _free and _close functions take NULL. */
#ifndef OHMEN_OHMEN_H
#define OHMEN_OHMEN_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ohmen/error.h"

/* "0.1.0" */
const char *ohmen_version(void);

/* For a program that is there for ohmen, before anything else: memory that is freed stays with the
 * process for what is asked for next, which saves time. Changes settings of the C library for the
 * whole process (of glibc; elsewhere it does nothing), so that the library never does it itself. */
void ohmen_keep_memory(void);

/* --- registers --- */

typedef struct ohmen_register ohmen_register;
typedef enum ohmen_mode { OHMEN_READ, OHMEN_WRITE } ohmen_mode;

/* Creates an empty register file; an existing file is refused (OHMEN_IO). */
ohmen_status ohmen_create(const char *path, ohmen_error *e);

/* OHMEN_REGISTER for what is no register, was written by a newer ohmen, or is
 * damaged. */
ohmen_status ohmen_open(const char *path, ohmen_mode mode, ohmen_register **out, ohmen_error *e);
void ohmen_close(ohmen_register *r);

/* Called now and then during long calls on a register, from the same thread: `done` of
 * `total` steps of a phase ("reading", "checking", "computing", "sampling",
 * "storing"). Must not call
 * the library. The time between two calls is not bounded. */
typedef void ohmen_progress(void *ctx, const char *phase, size_t done, size_t total);
void ohmen_watch(ohmen_register *r, ohmen_progress *progress, void *ctx);

/* Asked between batches of samples (phase "sampling"): true ends the sampling there, at least one
 * batch being taken. The call then returns OHMEN_INTERRUPTED, and a report as well (*out is set)
 * that says how many batches there were, and depends on nothing else of when it was interrupted.
 * Must not call the library. */
typedef bool ohmen_stop(void *ctx);
void ohmen_stop_when(ohmen_register *r, ohmen_stop *stop, void *ctx);

/* --- reports --- */

typedef struct ohmen_report ohmen_report;

typedef struct ohmen_layout {
    unsigned width; /* columns, 60 .. 200; others are clamped; default 100 */
    bool ascii;     /* default false */
    bool colour;    /* default false */
} ohmen_layout;
ohmen_layout ohmen_layout_defaults(void);

/* The report as text for people, as one JSON object, its tables as CSV, and as one page of
 * HTML that needs nothing else. Owned by the report; each call makes a new one. NULL when
 * out of memory. */
const char *ohmen_report_text(ohmen_report *r, const ohmen_layout *layout);
const char *ohmen_report_json(ohmen_report *r);
const char *ohmen_report_csv(ohmen_report *r);
const char *ohmen_report_html(ohmen_report *r);
void ohmen_report_free(ohmen_report *r);

/* Diagnostics that came with the report (an import that was refused):
 * "file:line:column: sentence". NULL behind the last. */
const char *ohmen_report_diagnostic(const ohmen_report *r, size_t i);

/* --- what a report is about --- */

typedef struct ohmen_query {
    const char *as_of;       /* what the journal knew: an entry's number, a date (end of that
                                day, UTC) or a UTC second; NULL: the newest */
    const char *perspective; /* whose damage counts; NULL: the register's own choice, "all":
                                every category */
    const char *site;        /* only hazards (of a list: objects) at this site and the sites in
                                it; NULL: all. A decision is about all hazards that it reaches */
    const char *date;        /* the day of evaluation, YYYY-MM-DD, until which evidence accrues;
                                NULL: today (UTC). What the journal knew is another question */

    /* Of ohmen_list and ohmen_hazards alone; the others do not look at it. */
    const char *const *where; /* conditions, all of which must hold: FIELD=TEXT, FIELD!=TEXT,
                                 FIELD<TEXT, FIELD<=TEXT, FIELD>TEXT, FIELD>=TEXT, FIELD~TEXT
                                 (contains), FIELD= (not given), FIELD!= (given). FIELD is a
                                 field of the documents ("owner", "test/every"), "id" or "name",
                                 of ohmen_hazards also "rank", "frequency", "damaging", "damage",
                                 "risk" and "criterion". OHMEN_UNKNOWN for a field that there is
                                 not, with the nearest name; OHMEN_USAGE for what does not fit
                                 the field */
    size_t n_where;
    const char *sort;         /* the field by which rows are ordered, those without it last, then
                                 by id; NULL: by id, hazards by rank */
    bool reverse;             /* from the greatest to the least; needs sort (OHMEN_USAGE) */

    /* Of samples over all that is unknown: ohmen_weigh, _memo, _sensitivity, _report_all, and
     * ohmen_explain where the figure comes from a sample. */
    unsigned samples;      /* values of each figure, in 16 independent sets at least: a power of 2
                              from 256 to 1048576, others are rounded up; 0: 512 */
    const char *precision; /* "0.5 %": stop as soon as the standard errors of the means of the
                              worths are at most that part of the greatest of them; `samples` is
                              the most then (0: 65536). NULL: all samples. OHMEN_USAGE for what is
                              no part between 0 and 1 */
    unsigned seed;         /* another seed, other samples; 0: 1 */
    unsigned threads;      /* at most 64; 0: one for each processor. The same figures for any */
    const char *kernels;   /* the instructions to compute with, "plain", "wide" or "widest"; the
                              same figures for all. NULL: the last of these that this processor
                              has. OHMEN_USAGE for others, or those that it has not */
    unsigned block;        /* samples that are computed at a time, for tests; 0: what suits */
} ohmen_query;
ohmen_query ohmen_query_defaults(void);

/* --- changing a register --- */

typedef struct ohmen_import_settings {
    const char *const *files; /* documents (*.yaml, *.yml, "-" is standard input) and lists of
                                 observations (*.csv) */
    size_t n_files;
    const char *author; /* who; required unless dry_run */
    const char *reason; /* why; required unless dry_run */
    bool dry_run;       /* preview: what would be added, changed, removed; stores nothing */
} ohmen_import_settings;

/* Reads all files, checks the register that would result, and stores the changes as
 * one entry, or nothing. The report lists what was (or would be) added, changed field
 * by field, and removed. OHMEN_INPUT: *out is a report too, with the diagnostics of
 * all files (it is the one exception to outputs being untouched on failure). */
ohmen_status ohmen_import(ohmen_register *r, const ohmen_import_settings *s, ohmen_report **out,
                          ohmen_error *e);

/* The register as documents: YAML of all objects, or CSV of all observations. Imported
 * into an empty register they give the same content hash. *text is owned by *out. */
typedef enum ohmen_export_part {
    OHMEN_EXPORT_OBJECTS,
    OHMEN_EXPORT_OBSERVATIONS
} ohmen_export_part;
ohmen_status ohmen_export(ohmen_register *r, const ohmen_query *q, ohmen_export_part part,
                          ohmen_report **out, const char **text, ohmen_error *e);

/* A copy while the register is in use; an existing file is refused (OHMEN_IO). */
ohmen_status ohmen_backup(ohmen_register *r, const char *path, ohmen_error *e);

/* --- reading a register --- */

/* Each hazard: frequency, damaging frequency, mean damage, risk, rank. */
ohmen_status ohmen_hazards(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                           ohmen_error *e);
/* What protection hinges on: the elements that carry the risk, single points of failure, breakers
 * without breaker failure protection, tests, what faults take away, unwanted operation, common
 * causes. */
ohmen_status ohmen_protection(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                              ohmen_error *e);
/* Supply: indices of interruption (IEEE 1366), the hazards that interrupt most, and sites; with a
 * site, what it contributes. */
ohmen_status ohmen_supply(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                          ohmen_error *e);
/* People: individual risk of each group over all hazards, its highest year, its place among the
 * criteria, and what it comes from. OHMEN_USAGE for a query with a site. */
ohmen_status ohmen_people(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                          ohmen_error *e);
/* Everything of one kind ("elements"), as a table. kind: a section of the documents. */
ohmen_status ohmen_list(ohmen_register *r, const ohmen_query *q, const char *kind,
                        ohmen_report **out, ohmen_error *e);
/* What is missing for the register to be kept alive: objects without owner, source, date of
 * review, status or test, and reviews that are overdue on the day of evaluation. */
ohmen_status ohmen_gaps(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                        ohmen_error *e);
/* One object of any kind with all that it says; a hazard with the numbers of its event
 * tree, an element or a scheme with where it is used. */
ohmen_status ohmen_show(ohmen_register *r, const ohmen_query *q, const char *id,
                        ohmen_report **out, ohmen_error *e);
/* A decision: its options and their combinations weighed against doing nothing. */
ohmen_status ohmen_weigh(ohmen_register *r, const ohmen_query *q, const char *decision,
                         ohmen_report **out, ohmen_error *e);
/* How sure the answer to a decision is, and what it depends on: the sample of its alternatives,
 * what each input swings, moves with and turns, and a map of the best alternative by two inputs.
 * x, y: names of figures that documents state ("bus-fault.rate"), NULL: those with the widest
 * swings. OHMEN_UNKNOWN with the nearest name for one that moves nothing in the decision. */
ohmen_status ohmen_sensitivity(ohmen_register *r, const ohmen_query *q, const char *decision,
                               const char *x, const char *y, ohmen_report **out, ohmen_error *e);
/* How bad it may get: the distribution of all damage over the horizon, of the register as it is
 * (decision NULL) or of each alternative of a decision. OHMEN_USAGE for a query with a site. */
ohmen_status ohmen_damage(ohmen_register *r, const ohmen_query *q, const char *decision,
                          ohmen_report **out, ohmen_error *e);
/* The memo of one decision, to be attached to a request for money. */
ohmen_status ohmen_memo(ohmen_register *r, const ohmen_query *q, const char *decision,
                        ohmen_report **out, ohmen_error *e);
/* The interval between routine tests of an element that costs least, with what each interval
 * costs per year in tests and in risk. OHMEN_COMPUTE for an element without a test, or on which
 * no hazard depends. */
ohmen_status ohmen_test_interval(ohmen_register *r, const ohmen_query *q, const char *element,
                                 ohmen_report **out, ohmen_error *e);
/* The grid of all hazards, or of one decision with arrows (decision not NULL). */
ohmen_status ohmen_grid(ohmen_register *r, const ohmen_query *q, const char *decision,
                        ohmen_report **out, ohmen_error *e);
/* The derivation of a figure ("H-BUS1.risk"), down to `depth` levels (0: all). */
ohmen_status ohmen_explain(ohmen_register *r, const ohmen_query *q, const char *figure,
                           unsigned depth, ohmen_report **out, ohmen_error *e);
/* The whole register as one document. */
ohmen_status ohmen_report_all(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                              ohmen_error *e);
/* The journal: all entries, or the versions of one object field by field. */
ohmen_status ohmen_history(ohmen_register *r, const char *id, ohmen_report **out, ohmen_error *e);
/* Proof of the file: hashes, chain, derived tables. OHMEN_REGISTER with a report of
 * findings (*out is set) when anything is wrong. */
ohmen_status ohmen_verify(ohmen_register *r, ohmen_report **out, ohmen_error *e);

/* JSON Schema of the documents (static text). */
const char *ohmen_document_schema(void);

#endif
