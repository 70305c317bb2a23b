/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Field tables of what protects and of what happens: rates, types, elements, common
 * causes, schemes, hazards with their responses and outcomes. */
#include "model/tables.h"

const char *const element_kinds[] = {"relay",   "receiver",  "setting",      "ct",
                                     "vt",      "dc-supply", "trip-circuit", "breaker",
                                     "channel", "wiring",    "person",       NULL};
const char *const prior_forms[] = {"jeffreys", "constrained", "gamma", "lognormal", "fixed", NULL};
const char *const prior_solutions[] = {"upper", "lower", NULL};
const char *const demand_priors[] = {"jeffreys", "uniform", NULL};
const char *const share_priors[] = {"uniform", "jeffreys", NULL};
const char *const hazard_status[] = {"open", "being-treated", "accepted", "closed", NULL};

#define SOURCE_FIELD(T)                                                                            \
    F(T, source, "source", REF, "Where the number comes from", .kinds = KIND_BIT(KIND_SOURCE),     \
      .flags = TRACE)
#define NOTE_FIELD(T) F(T, note, "note", TEXT, "Anything else")
#define NAME_FIELD(T) F(T, name, "name", TEXT, "What it is")
#define SITE_FIELD(T)                                                                              \
    F(T, site, "site", REF, "Where it is", .kinds = KIND_BIT(KIND_SITE), .flags = TRACE)

/* {is:, source:} for each dimension that is asked for. */
#define ESTIMATE_TABLE(variable, name_, dim_)                                                      \
    static const struct field variable##_fields[] = {                                              \
        F(struct estimate, is, "is", QUANTITY, "The number", .dim = dim_,                          \
          .flags = REQUIRED | NOT_NEGATIVE),                                                       \
        SOURCE_FIELD(struct estimate),                                                             \
        NOTE_FIELD(struct estimate),                                                               \
    };                                                                                             \
    const struct table variable = TABLE(struct estimate, name_, variable##_fields,                 \
                                        "A number and where it comes from", .short_key = "is")
ESTIMATE_TABLE(table_probability, "probability", PROBABILITY);
ESTIMATE_TABLE(table_money_rate, "yearly cost", MONEY_RATE);
ESTIMATE_TABLE(table_rate_per_time, "frequency", FREQUENCY);

static const struct group is_or_record[] = {{true, {"is", "prior"}}};
static const struct field demand_record_fields[] = {
    F(struct demand_record, is, "is", QUANTITY, "Probability of failure on demand",
      .dim = PROBABILITY),
    F(struct demand_record, prior, "prior", WORD,
      "Prior for the counts: beta(1/2, 1/2) or beta(1, 1)", .words = demand_priors),
    F(struct demand_record, failures, "failures", COUNT, "Failures seen", .low = 0,
      .high = 1000000000000),
    F(struct demand_record, demands, "demands", COUNT, "Demands seen, failures among them",
      .low = 0, .high = 1000000000000),
    SOURCE_FIELD(struct demand_record),
    NOTE_FIELD(struct demand_record),
};
const struct table table_demand_record =
    TABLE(struct demand_record, "failure on demand", demand_record_fields,
          "Probability of failure on demand, stated or learnt from counts", GROUPS(is_or_record),
          .short_key = "is");

static const struct field prior_fields[] = {
    F(struct prior, form, "form", WORD,
      "Form of the prior; where it is left out, its parameters tell", .words = prior_forms),
    F(struct prior, mean, "mean", QUANTITY, "Mean", .dim = ANY,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, weight, "weight", QUANTITY,
      "Weight in events: the shape of a gamma distribution", .dim = NUMBER,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, median, "median", QUANTITY, "Median", .dim = ANY,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, error_factor, "error-factor", QUANTITY, "95 % point over median", .dim = NUMBER,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, p5, "p5", QUANTITY, "5 % point", .dim = ANY,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, p50, "p50", QUANTITY, "50 % point", .dim = ANY,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, p95, "p95", QUANTITY, "95 % point", .dim = ANY,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, p99, "p99", QUANTITY, "99 % point", .dim = ANY,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct prior, solution, "solution", WORD,
      "Which shape, where a mean and a percentile have two", .words = prior_solutions),
    SOURCE_FIELD(struct prior),
};
static const struct table table_prior = TABLE(
    struct prior, "prior", prior_fields, "What is known of a rate before local events are counted");

static const struct field exposure_fields[] = {
    F(struct exposure, from, "from", DATE, "First day", .flags = REQUIRED),
    F(struct exposure, to, "to", DATE,
      "Last day, itself included; the day of evaluation where it is left out"),
    F(struct exposure, amount, "amount", QUANTITY, "How much is exposed: 8 section, 14 km",
      .dim = ANY, .flags = REQUIRED | CERTAIN | CONSTANT | POSITIVE),
};
static const struct table table_exposure =
    TABLE(struct exposure, "exposure", exposure_fields, "A dated stretch");
static const struct field exposure_part = PART(STRUCT, "A stretch", .table = &table_exposure);
static const struct field count_part = PART(COUNT, "Faults", .low = 0, .high = 1000000000000);

static const struct group rate_is_or_prior[] = {{true, {"is", "prior"}}};
static const struct field rate_fields[] = {
    NAME_FIELD(struct rate),
    F(struct rate, per, "per", UNIT, "Exposure and time that the rate counts by, such as section a",
      .flags = REQUIRED),
    F(struct rate, is, "is", QUANTITY, "The rate itself, a number or a distribution", .dim = ANY,
      .flags = NOT_NEGATIVE),
    F(struct rate, prior, "prior", STRUCT, "Prior knowledge, to be combined with local events",
      .table = &table_prior),
    F(struct rate, events, "events", COUNT, "Local events counted over the exposure", .low = 0,
      .high = 1000000000000),
    F(struct rate, exposure, "exposure", ROWS,
      "Dated stretches of local exposure, which add up even where they overlap",
      .part = &exposure_part),
    F(struct rate, growth, "growth", QUANTITY, "Growth of the rate per year, such as 2 % per a",
      .dim = FREQUENCY, .flags = CERTAIN | CONSTANT),
    F(struct rate, since, "since", DATE, "Day from which the age counts"),
    F(struct rate, ageing, "ageing", QUANTITY,
      "Exponent of the power law of ageing; above 1 the rate rises with age", .dim = NUMBER,
      .flags = CERTAIN | CONSTANT | POSITIVE),
    F(struct rate, kinds_of_fault, "kinds", ROWS, "Local faults counted by kind, two kinds or more",
      .part = &count_part),
    F(struct rate, kinds_prior, "kinds-prior", WORD,
      "Prior of the shares: 1 or 1/2 for each kind; uniform where it is left out",
      .words = share_priors),
    SOURCE_FIELD(struct rate),
    NOTE_FIELD(struct rate),
};
const struct table table_rate =
    TABLE(struct rate, "rate", rate_fields, "Occurrences per exposure and time (IEC 60050-192)",
          GROUPS(rate_is_or_prior));

static const struct field test_fields[] = {
    F(struct test, every, "every", QUANTITY, "Interval of the routine test", .dim = TIME,
      .flags = REQUIRED | CERTAIN | CONSTANT | POSITIVE),
    F(struct test, last, "last", DATE, "Day of the last test"),
    F(struct test, next, "next", DATE,
      "Day of the next planned test; the first whole number of intervals behind the last test "
      "that lies behind the day of evaluation where it is left out"),
    F(struct test, takes, "takes", QUANTITY, "Time out of service for a test", .dim = TIME,
      .flags = CERTAIN | CONSTANT | NOT_NEGATIVE),
    F(struct test, costs, "costs", QUANTITY, "Cost of a test", .dim = MONEY, .flags = NOT_NEGATIVE),
    F(struct test, finds, "finds", QUANTITY, "Share of undetected failures that the test finds",
      .dim = PROBABILITY),
    F(struct test, leaves_failed, "leaves-failed", QUANTITY,
      "Probability that the test leaves the element failed", .dim = PROBABILITY),
    F(struct test, trips, "trips", QUANTITY, "Probability that the test trips the plant",
      .dim = PROBABILITY),
    SOURCE_FIELD(struct test),
};
const struct table table_test =
    TABLE(struct test, "routine test", test_fields, "The routine test of an element");

static const struct field unwanted_event =
    PART(STRUCT, "Probability per event", .table = &table_probability);
static const struct field unwanted_fields[] = {
    F(struct unwanted, by_itself, "by-itself", STRUCT, "Unwanted operations without any event",
      .table = &table_rate_per_time),
    F(struct unwanted, per_event, "per-event", ROWS, "Probability per event of each stress class",
      .part = &unwanted_event),
};
const struct table table_unwanted = TABLE(struct unwanted, "unwanted operation", unwanted_fields,
                                          "Unwanted operation (IEC 60050-448)");

static const struct field element_fields[] = {
    NAME_FIELD(struct element),
    F(struct element, kind, "kind", WORD, "What sort of part it is", .words = element_kinds),
    F(struct element, type, "type", REF, "The type whose data it shares",
      .kinds = KIND_BIT(KIND_TYPE)),
    SITE_FIELD(struct element),
    F(struct element, per_demand, "per-demand", STRUCT,
      "Probability of failure to operate on demand", .table = &table_demand_record),
    F(struct element, undetected, "undetected", STRUCT,
      "Rate of failures that only a test or a demand shows", .table = &table_rate_per_time),
    F(struct element, detected, "detected", STRUCT, "Rate of failures that supervision shows",
      .table = &table_rate_per_time),
    F(struct element, repair, "repair", QUANTITY, "Time to repair once known", .dim = TIME,
      .flags = NOT_NEGATIVE),
    F(struct element, out_while_repaired, "plant-out-while-repaired", YES,
      "Is the plant, not only the element, out of service during a repair?"),
    F(struct element, out_of_service, "out-of-service", STRUCT,
      "Share of time out of service for other reasons", .table = &table_probability),
    F(struct element, exercised, "exercised", QUANTITY, "Operations that show whether it works",
      .dim = FREQUENCY, .flags = NOT_NEGATIVE),
    F(struct element, revealed_by, "revealed-by", REFS,
      "Hazards that call on it, after each of which a failure is found and mended",
      .kinds = KIND_BIT(KIND_HAZARD), .flags = FREQUENCY_ONLY),
    F(struct element, since, "since", DATE, "In service since"),
    F(struct element, known, "when-known", DATE, "Last known to be sound"),
    F(struct element, test, "test", STRUCT, "Routine test", .table = &table_test),
    F(struct element, unwanted, "unwanted", STRUCT, "Unwanted operation", .table = &table_unwanted),
    SOURCE_FIELD(struct element),
    NOTE_FIELD(struct element),
};
const struct table table_element =
    TABLE(struct element, "element", element_fields, "One part that protection depends on");

static const struct field type_fields[] = {
    NAME_FIELD(struct element_type),
    F(struct element_type, kind, "kind", WORD, "What sort of part it is", .words = element_kinds),
    F(struct element_type, per_demand, "per-demand", STRUCT,
      "Probability of failure to operate on demand", .table = &table_demand_record),
    F(struct element_type, undetected, "undetected", STRUCT,
      "Rate of failures that only a test or a demand shows", .table = &table_rate_per_time),
    F(struct element_type, detected, "detected", STRUCT, "Rate of failures that supervision shows",
      .table = &table_rate_per_time),
    F(struct element_type, repair, "repair", QUANTITY, "Time to repair once known", .dim = TIME,
      .flags = NOT_NEGATIVE),
    F(struct element_type, unwanted, "unwanted", STRUCT, "Unwanted operation",
      .table = &table_unwanted),
    SOURCE_FIELD(struct element_type),
    NOTE_FIELD(struct element_type),
};
const struct table table_type =
    TABLE(struct element_type, "type", type_fields, "What all elements of one make have in common");

static const struct field factor_part =
    PART(QUANTITY, "Alpha factor", .dim = PROBABILITY, .flags = CERTAIN | CONSTANT);
static const struct field common_cause_fields[] = {
    NAME_FIELD(struct common_cause),
    F(struct common_cause, beta, "beta", QUANTITY,
      "Share of undetected failures with a common cause", .dim = PROBABILITY),
    F(struct common_cause, beta_detected, "beta-detected", QUANTITY,
      "Share of detected failures with a common cause", .dim = PROBABILITY),
    F(struct common_cause, of, "of", REFS, "The elements that may fail together",
      .kinds = KIND_BIT(KIND_ELEMENT), .flags = REQUIRED),
    F(struct common_cause, found_by, "found-by", REF,
      "The element whose test finds the common failure", .kinds = KIND_BIT(KIND_ELEMENT)),
    F(struct common_cause, settings, "settings", YES, "Is the common cause a wrong setting?"),
    F(struct common_cause, factors, "factors", LIST,
      "Alpha factors instead of beta: shares of the failures of one, of two, ... elements",
      .part = &factor_part),
    F(struct common_cause, staggered, "staggered", YES,
      "Do the alpha factors come from staggered tests?"),
    SOURCE_FIELD(struct common_cause),
    NOTE_FIELD(struct common_cause),
};
static const struct group beta_or_factors[] = {{true, {"beta", "factors"}}};
const struct table table_common_cause =
    TABLE(struct common_cause, "common cause", common_cause_fields,
          "Elements that fail from one cause", GROUPS(beta_or_factors));

static const struct field scheme_fields[] = {
    NAME_FIELD(struct scheme),
    SITE_FIELD(struct scheme),
    F(struct scheme, works, "works", STRUCTURE, "What must work for the function to operate",
      .kinds = KIND_BIT(KIND_ELEMENT) | KIND_BIT(KIND_SCHEME), .flags = REQUIRED),
    F(struct scheme, trips_on, "trips-on", STRUCTURE,
      "What makes it operate unwantedly, where the default does not fit",
      .kinds = KIND_BIT(KIND_ELEMENT) | KIND_BIT(KIND_SCHEME)),
    SOURCE_FIELD(struct scheme),
    NOTE_FIELD(struct scheme),
};
const struct table table_scheme = TABLE(struct scheme, "scheme", scheme_fields,
                                        "How elements together perform one protection function",
                                        .short_key = "works", .structure_keys = true);

static const struct table table_branch;
static const struct field branch_part = PART(STRUCT, "A branch", .table = &table_branch);
#define BRANCH_FIELDS(T, in)                                                                       \
    F(T, in outcome, "outcome", NAME, "The outcome that this ends in, or none"),                   \
        F(T, in split, "split", ROWS, "Branches with their shares", .part = &branch_part),         \
        F(T, in if_works, "if-works", REF, "A scheme or element that decides between yes and no",  \
          .kinds = KIND_BIT(KIND_SCHEME) | KIND_BIT(KIND_ELEMENT)),                                \
        F(T, in yes, "yes", STRUCT, "What follows where it works", .table = &table_branch),        \
        F(T, in no, "no", STRUCT, "What follows where it does not", .table = &table_branch)

static const struct group branch_ends[] = {{true, {"outcome", "split", "if-works"}}};
static const struct field branch_fields[] = {
    F(struct branch, share, "share", QUANTITY, "Share of this branch, or rest", .dim = PROBABILITY,
      .flags = REST),
    BRANCH_FIELDS(struct branch, ),
};
static const struct table table_branch =
    TABLE(struct branch, "branch", branch_fields, "A branch of the event tree (IEC 62502)",
          GROUPS(branch_ends));

static const struct field response_fields[] = {
    F(struct response_row, cleared_by, "cleared-by", REF,
      "The scheme that clears the fault in this row",
      .kinds = KIND_BIT(KIND_SCHEME) | KIND_BIT(KIND_ELEMENT)),
    F(struct response_row, breaker_failure_of, "breaker-failure-of", NAME,
      "The row whose breaker this row backs up: it acts where that row's protection has operated "
      "and its breaker has not opened"),
    F(struct response_row, in, "in", QUANTITY, "Clearance time", .dim = TIME,
      .flags = CERTAIN | CONSTANT | NOT_NEGATIVE),
    F(struct response_row, sees, "sees", STRUCT,
      "Share of the faults that the function sees at all", .table = &table_probability),
    BRANCH_FIELDS(struct response_row, then.),
};
static const struct table table_response =
    TABLE(struct response_row, "response row", response_fields, "One row of a hazard's response",
          GROUPS(branch_ends));
static const struct field response_part = PART(STRUCT, "A row", .table = &table_response);

static const struct group is_or_varies[] = {{true, {"is", "varies"}}};
static const struct field damage_fields[] = {
    F(struct damage_item, name, "name", TEXT, "What is damaged"),
    F(struct damage_item, category, "category", NAME,
      "Category of damage, such as equipment, crew or lost-load", .flags = REQUIRED),
    F(struct damage_item, is, "is", QUANTITY, "What it costs", .dim = MONEY, .flags = NOT_NEGATIVE),
    F(struct damage_item, varies, "varies", QUANTITY,
      "What it costs, drawn anew at each occurrence", .dim = MONEY,
      .flags = NOT_NEGATIVE | VARYING),
    SOURCE_FIELD(struct damage_item),
    NOTE_FIELD(struct damage_item),
};
static const struct table table_damage =
    TABLE(struct damage_item, "damage item", damage_fields, "What one outcome costs, by category",
          GROUPS(is_or_varies));
static const struct field damage_part = PART(STRUCT, "An item", .table = &table_damage);

static const struct field interruption_fields[] = {
    F(struct interruption, customers, "customers", COUNT, "Customers interrupted", .low = 0,
      .high = 1000000000000),
    F(struct interruption, load, "load", QUANTITY, "Load interrupted", .dim = POWER,
      .flags = NOT_NEGATIVE),
    F(struct interruption, lasts, "for", QUANTITY, "How long", .dim = TIME,
      .flags = REQUIRED | NOT_NEGATIVE),
};
static const struct table table_interruption =
    TABLE(struct interruption, "interruption", interruption_fields,
          "Customers and load interrupted for a time");
static const struct field interruption_part =
    PART(STRUCT, "Who is interrupted", .table = &table_interruption);

static const struct field harm_fields[] = {
    F(struct harm, present, "present", QUANTITY,
      "Probability that a given person of the group is there", .dim = PROBABILITY,
      .flags = REQUIRED),
    F(struct harm, death, "death", QUANTITY, "Probability of death of a person who is there",
      .dim = PROBABILITY),
    F(struct harm, injury, "injury", QUANTITY, "Probability of injury of a person who is there",
      .dim = PROBABILITY),
};
static const struct table table_harm =
    TABLE(struct harm, "harm", harm_fields, "Harm to a group of people");
static const struct field harm_part = PART(STRUCT, "Harm to a group", .table = &table_harm);

static const struct field outcome_fields[] = {
    F(struct outcome, name, "name", TEXT, "What has happened", .flags = REQUIRED),
    F(struct outcome, damage, "damage", ROWS, "What it costs", .part = &damage_part),
    F(struct outcome, interruptions, "interruptions", ROWS, "Who is without supply for how long",
      .part = &interruption_part),
    F(struct outcome, harm, "harm", ROWS, "Harm to people, by group", .part = &harm_part,
      .kinds = KIND_BIT(KIND_GROUP)),
    NOTE_FIELD(struct outcome),
};
static const struct table table_outcome =
    TABLE(struct outcome, "outcome", outcome_fields, "An end state of a hazard (IEC 62502)");
static const struct field outcome_part = PART(STRUCT, "An outcome", .table = &table_outcome);
static const struct field disables_part =
    PART(STRUCT, "Probability that it is put out of action", .table = &table_probability);

static const struct field hazard_fields[] = {
    F(struct hazard, name, "name", TEXT, "The initiating event", .flags = REQUIRED),
    SITE_FIELD(struct hazard),
    F(struct hazard, owner, "owner", TEXT, "Who answers for it (ISO 31000)"),
    F(struct hazard, status, "status", WORD, "Where its treatment stands", .words = hazard_status),
    F(struct hazard, treatment, "treatment", TEXT, "What is being done about it"),
    F(struct hazard, review, "review", DATE, "When it is to be looked at again"),
    F(struct hazard, frequency, "frequency", QUANTITY,
      "How often it occurs: any expression of rates", .dim = FREQUENCY,
      .flags = REQUIRED | NOT_NEGATIVE),
    F(struct hazard, growth, "growth", QUANTITY, "Growth per year", .dim = FREQUENCY,
      .flags = CERTAIN | CONSTANT),
    F(struct hazard, response, "response", ROWS, "How protection responds, row by row",
      .part = &response_part, .flags = REQUIRED),
    F(struct hazard, outcomes, "outcomes", ROWS, "What it may end in", .part = &outcome_part,
      .flags = REQUIRED),
    F(struct hazard, disables, "disables", ROWS,
      "Elements that the hazard itself may put out of action, with the probability",
      .part = &disables_part, .kinds = KIND_BIT(KIND_ELEMENT)),
    SOURCE_FIELD(struct hazard),
    NOTE_FIELD(struct hazard),
};
const struct table table_hazard =
    TABLE(struct hazard, "hazard", hazard_fields,
          "An initiating event, how protection responds, what each outcome costs");
