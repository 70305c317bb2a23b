/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Field tables of the register itself and of what stands around the network:
 * sources, sites, groups of people, named values, plans. */
#include "model/tables.h"

const char *const yearly_amounts[] = {"mid-year", "end-of-year", NULL};
const char *const scope_words[] = {"hazard", "site", "register", NULL};
const char *const source_kinds[] = {"publication", "standard",   "test-record",
                                    "inspection",  "statistics", "manufacturer",
                                    "price-list",  "judgement",  NULL};

static const struct field money_criteria_fields[] = {
    F(struct money_criteria, scope, "scope", WORD, "What the limits apply to", .words = scope_words,
      .flags = REQUIRED),
    F(struct money_criteria, acceptable_below, "acceptable-below", QUANTITY,
      "Risk below which nothing need be done", .dim = MONEY_RATE,
      .flags = CERTAIN | POSITIVE | CONSTANT),
    F(struct money_criteria, intolerable_above, "intolerable-above", QUANTITY,
      "Risk above which something must be done", .dim = MONEY_RATE,
      .flags = CERTAIN | POSITIVE | CONSTANT),
};
static const struct table table_money_criteria = TABLE(
    struct money_criteria, "money criteria", money_criteria_fields, "Limits of risk in money");

static const struct field people_criteria_fields[] = {
    F(struct people_criteria, acceptable_below, "acceptable-below", QUANTITY,
      "Individual risk that is broadly acceptable", .dim = FREQUENCY,
      .flags = CERTAIN | POSITIVE | CONSTANT),
    F(struct people_criteria, intolerable_above, "intolerable-above", QUANTITY,
      "Individual risk that is intolerable", .dim = FREQUENCY,
      .flags = CERTAIN | POSITIVE | CONSTANT),
    F(struct people_criteria, disproportion, "disproportion", QUANTITY,
      "How many times its benefit a measure may cost before it is grossly disproportionate",
      .dim = NUMBER, .flags = CERTAIN | POSITIVE | CONSTANT),
    F(struct people_criteria, per_fatality, "per-fatality", QUANTITY,
      "Money that society would spend to avoid one expected fatality", .dim = MONEY,
      .flags = CERTAIN | POSITIVE | CONSTANT),
};
static const struct table table_people_criteria = TABLE(
    struct people_criteria, "people criteria", people_criteria_fields, "Limits of risk to people");

static const struct field criteria_fields[] = {
    F(struct criteria, money, "money", STRUCT, "Limits in money", .table = &table_money_criteria),
    F(struct criteria, people, "people", STRUCT, "Limits for people",
      .table = &table_people_criteria),
};
static const struct table table_criteria = TABLE(
    struct criteria, "criteria", criteria_fields,
    "The lines between acceptable, tolerable if reduced as far as is reasonable, and intolerable");

static const struct field perspective_part =
    PART(NAMES, "The categories of damage that this perspective bears");

static const struct field register_fields[] = {
    F(struct register_settings, title, "title", TEXT, "What the register is about",
      .flags = REQUIRED),
    F(struct register_settings, currency, "currency", NAME,
      "ISO 4217 code of the currency, such as EUR", .flags = REQUIRED),
    F(struct register_settings, prices, "prices", COUNT, "Year of the prices", .low = 1900,
      .high = 2200, .flags = REQUIRED),
    F(struct register_settings, start, "start", WHEN,
      "First day of the horizon; 1 January of the year of the prices where it is left out"),
    F(struct register_settings, horizon, "horizon", QUANTITY, "How many years are looked ahead",
      .dim = TIME, .flags = REQUIRED | CERTAIN | POSITIVE | CONSTANT),
    F(struct register_settings, discount, "discount", QUANTITY, "Interest, such as 4 % per a",
      .dim = INTEREST, .flags = REQUIRED | CERTAIN | CONSTANT),
    F(struct register_settings, counts, "counts", NAMES,
      "Countable things that serve as units: section, bay"),
    F(struct register_settings, customers_served, "customers-served", COUNT,
      "Customers that the network serves", .low = 0, .high = 1000000000000),
    F(struct register_settings, steady, "steady", YES,
      "Are figures long-run averages, instead of those of each year of the horizon?"),
    F(struct register_settings, yearly_amounts, "yearly-amounts", WORD,
      "When damage and running cost of a year count as paid; mid-year where it is left out",
      .words = yearly_amounts),
    F(struct register_settings, sustained_over, "sustained-over", QUANTITY,
      "Interruptions longer than this count as sustained (IEEE 1366)", .dim = TIME,
      .flags = CERTAIN | NOT_NEGATIVE | CONSTANT),
    F(struct register_settings, perspectives, "perspectives", ROWS,
      "Who bears which categories of damage", .part = &perspective_part),
    F(struct register_settings, perspective, "perspective", NAME,
      "The perspective of reports that do not name one; all categories where it is left out"),
    F(struct register_settings, criteria, "criteria", STRUCT, "Limits of risk",
      .table = &table_criteria),
    F(struct register_settings, note, "note", TEXT, "Anything else that a reader should know"),
};
const struct table table_register = TABLE(struct register_settings, "register", register_fields,
                                          "The register itself: one in each file");

static const struct field source_fields[] = {
    F(struct source, title, "title", TEXT, "Title of the publication, record or judgement",
      .flags = REQUIRED),
    F(struct source, kind, "kind", WORD, "What it is", .words = source_kinds),
    F(struct source, by, "by", TEXT, "Author, or whose judgement it is"),
    F(struct source, date, "date", DATE, "When it was made"),
    F(struct source, reference, "reference", TEXT, "Table, page, or number of the record"),
    F(struct source, verified, "verified", YES, "Has somebody looked it up?"),
    F(struct source, note, "note", TEXT, "Anything else"),
};
const struct table table_source =
    TABLE(struct source, "source", source_fields, "Where a number comes from");

static const struct field site_fields[] = {
    F(struct site, name, "name", TEXT, "Name of the place", .flags = REQUIRED),
    F(struct site, in, "in", REF, "The site that this one is part of",
      .kinds = KIND_BIT(KIND_SITE)),
    F(struct site, customers, "customers", COUNT,
      "Customers supplied from here, at the sites in it too", .low = 0, .high = 1000000000000),
    F(struct site, load, "load", QUANTITY, "Load supplied from here, at the sites in it too",
      .dim = POWER, .flags = NOT_NEGATIVE),
    F(struct site, note, "note", TEXT, "Anything else"),
};
const struct table table_site =
    TABLE(struct site, "site", site_fields, "A place in the network; sites nest");

static const struct field group_fields[] = {
    F(struct group_of_people, name, "name", TEXT, "Who they are", .flags = REQUIRED),
    F(struct group_of_people, persons, "persons", COUNT, "How many", .low = 0,
      .high = 1000000000000, .flags = REQUIRED),
    F(struct group_of_people, site, "site", REF, "Where they are", .kinds = KIND_BIT(KIND_SITE),
      .flags = TRACE),
    F(struct group_of_people, note, "note", TEXT, "Anything else"),
};
const struct table table_group =
    TABLE(struct group_of_people, "group", group_fields, "People who may come to harm");

static const struct group is_or_varies[] = {{true, {"is", "varies"}}};

static const struct field value_fields[] = {
    F(struct value, name, "name", TEXT, "What it is"),
    F(struct value, is, "is", QUANTITY, "The one value, known or not; the same wherever it is used",
      .dim = ANY),
    F(struct value, varies, "varies", QUANTITY, "How it varies from one occurrence to the next",
      .dim = ANY, .flags = VARYING),
    F(struct value, source, "source", REF, "Where the number comes from",
      .kinds = KIND_BIT(KIND_SOURCE), .flags = TRACE),
    F(struct value, note, "note", TEXT, "Anything else"),
};
const struct table table_value =
    TABLE(struct value, "value", value_fields, "A named quantity, usable in any expression",
          GROUPS(is_or_varies), .short_key = "is");

static const struct field year_money =
    PART(QUANTITY, "Money", .dim = MONEY, .flags = CERTAIN | NOT_NEGATIVE | CONSTANT);
static const struct field any_amount =
    PART(QUANTITY, "Amount", .dim = ANY, .flags = CERTAIN | CONSTANT);
static const struct field plan_fields[] = {
    F(struct plan, name, "name", TEXT, "What the plan is for", .flags = REQUIRED),
    F(struct plan, budgets, "budgets", ROWS, "Money that may be invested in each year",
      .part = &year_money, .year_keys = true, .flags = LATER),
    F(struct plan, limits, "limits", ROWS, "How much there is of each resource",
      .part = &any_amount, .flags = LATER),
    F(struct plan, must, "must", REFS, "Options that are settled", .kinds = KIND_BIT(KIND_OPTION),
      .flags = LATER),
    F(struct plan, options, "options", REFS, "Options to choose among; all where it is left out",
      .kinds = KIND_BIT(KIND_OPTION), .flags = LATER),
    F(struct plan, note, "note", TEXT, "Anything else"),
};
const struct table table_plan =
    TABLE(struct plan, "plan", plan_fields, "Options under yearly budgets");
