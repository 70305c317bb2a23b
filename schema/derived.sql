-- SPDX-License-Identifier: GPL-3.0-or-later
-- The derived tables of a register, made from the field tables of src/model;
-- a test holds this file to what the program makes. They follow from the enduring
-- tables (schema/register.sql) alone and can be dropped at any time. Only live
-- objects have rows. Quantities stand as they are written in documents.

CREATE TABLE "object"( -- The live version of each object
    "kind" TEXT NOT NULL, -- Kind of the object
    "id" TEXT NOT NULL, -- Id of the object
    "seq" INTEGER NOT NULL, -- Entry that made this version
    "body" TEXT NOT NULL, -- Hash of its body
    PRIMARY KEY("kind", "id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "reference"( -- Which live object refers to which
    "kind" TEXT NOT NULL, -- Kind of the object that refers
    "from" TEXT NOT NULL, -- Its id
    "path" TEXT NOT NULL, -- Where in it
    "to" TEXT NOT NULL, -- Id that it refers to
    "trace" INTEGER NOT NULL, -- 1: computes nothing (a site, a source); 0: it does
    PRIMARY KEY("kind", "from", "path", "to")
) STRICT, WITHOUT ROWID;

CREATE TABLE "snapshot"( -- All live versions at some entries
    "at" INTEGER NOT NULL, -- The entry
    "kind" TEXT NOT NULL, -- Kind of the object
    "id" TEXT NOT NULL, -- Id of the object
    "seq" INTEGER NOT NULL, -- Entry that made this version
    "body" TEXT NOT NULL, -- Hash of its body
    PRIMARY KEY("at", "kind", "id")
) STRICT, WITHOUT ROWID;

CREATE INDEX "reference_to" ON "reference"("to");

CREATE TABLE "register"( -- The register itself: one in each file
    "id" TEXT NOT NULL, -- Id of the object
    "title" TEXT, -- What the register is about
    "currency" TEXT, -- ISO 4217 code of the currency, such as EUR
    "prices" INTEGER, -- Year of the prices
    "start" TEXT, -- First day of the horizon; 1 January of the year of the prices where it is left out
    "horizon" TEXT, -- How many years are looked ahead
    "discount" TEXT, -- Interest, such as 4 % per a
    "customers_served" INTEGER, -- Customers that the network serves
    "steady" INTEGER, -- Are figures long-run averages, instead of those of each year of the horizon?
    "yearly_amounts" TEXT, -- When damage and running cost of a year count as paid; mid-year where it is left out
    "sustained_over" TEXT, -- Interruptions longer than this count as sustained (IEEE 1366)
    "perspective" TEXT, -- The perspective of reports that do not name one; all categories where it is left out
    "criteria_money_scope" TEXT, -- What the limits apply to
    "criteria_money_acceptable_below" TEXT, -- Risk below which nothing need be done
    "criteria_money_intolerable_above" TEXT, -- Risk above which something must be done
    "criteria_people_acceptable_below" TEXT, -- Individual risk that is broadly acceptable
    "criteria_people_intolerable_above" TEXT, -- Individual risk that is intolerable
    "criteria_people_disproportion" TEXT, -- How many times its benefit a measure may cost before it is grossly disproportionate
    "criteria_people_per_fatality" TEXT, -- Money that society would spend to avoid one expected fatality
    "note" TEXT, -- Anything else that a reader should know
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "register_counts"( -- Countable things that serve as units: section, bay
    "register" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("register", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "register_perspectives"( -- The categories of damage that this perspective bears
    "register" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("register", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "register_perspectives_item"( -- The categories of damage that this perspective bears
    "register" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("register", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "source"( -- Where a number comes from
    "id" TEXT NOT NULL, -- Id of the object
    "title" TEXT, -- Title of the publication, record or judgement
    "kind" TEXT, -- What it is
    "by" TEXT, -- Author, or whose judgement it is
    "date" TEXT, -- When it was made
    "reference" TEXT, -- Table, page, or number of the record
    "verified" INTEGER, -- Has somebody looked it up?
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "site"( -- A place in the network; sites nest
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- Name of the place
    "in" TEXT, -- The site that this one is part of
    "customers" INTEGER, -- Customers supplied from here, at the sites in it too
    "load" TEXT, -- Load supplied from here, at the sites in it too
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "group"( -- People who may come to harm
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- Who they are
    "persons" INTEGER, -- How many
    "site" TEXT, -- Where they are
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "value"( -- A named quantity, usable in any expression
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What it is
    "is" TEXT, -- The one value, known or not; the same wherever it is used
    "varies" TEXT, -- How it varies from one occurrence to the next
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "rate"( -- Occurrences per exposure and time (IEC 60050-192)
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What it is
    "per" TEXT, -- Exposure and time that the rate counts by, such as section a
    "is" TEXT, -- The rate itself, a number or a distribution
    "prior_form" TEXT, -- Form of the prior; where it is left out, its parameters tell
    "prior_mean" TEXT, -- Mean
    "prior_weight" TEXT, -- Weight in events: the shape of a gamma distribution
    "prior_median" TEXT, -- Median
    "prior_error_factor" TEXT, -- 95 % point over median
    "prior_p5" TEXT, -- 5 % point
    "prior_p50" TEXT, -- 50 % point
    "prior_p95" TEXT, -- 95 % point
    "prior_p99" TEXT, -- 99 % point
    "prior_solution" TEXT, -- Which shape, where a mean and a percentile have two
    "prior_source" TEXT, -- Where the number comes from
    "events" INTEGER, -- Local events counted over the exposure
    "growth" TEXT, -- Growth of the rate per year, such as 2 % per a
    "since" TEXT, -- Day from which the age counts
    "ageing" TEXT, -- Exponent of the power law of ageing; above 1 the rate rises with age
    "kinds_prior" TEXT, -- Prior of the shares: 1 or 1/2 for each kind; uniform where it is left out
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "exposure"( -- A dated stretch
    "rate" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "from" TEXT, -- First day
    "to" TEXT, -- Last day, itself included; the day of evaluation where it is left out
    "amount" TEXT, -- How much is exposed: 8 section, 14 km
    PRIMARY KEY("rate", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "rate_kinds"( -- Faults
    "rate" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" INTEGER, -- Faults
    PRIMARY KEY("rate", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "type"( -- What all elements of one make have in common
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What it is
    "kind" TEXT, -- What sort of part it is
    "per_demand_is" TEXT, -- Probability of failure on demand
    "per_demand_prior" TEXT, -- Prior for the counts: beta(1/2, 1/2) or beta(1, 1)
    "per_demand_failures" INTEGER, -- Failures seen
    "per_demand_demands" INTEGER, -- Demands seen, failures among them
    "per_demand_source" TEXT, -- Where the number comes from
    "per_demand_note" TEXT, -- Anything else
    "undetected_is" TEXT, -- The number
    "undetected_source" TEXT, -- Where the number comes from
    "undetected_note" TEXT, -- Anything else
    "detected_is" TEXT, -- The number
    "detected_source" TEXT, -- Where the number comes from
    "detected_note" TEXT, -- Anything else
    "repair" TEXT, -- Time to repair once known
    "unwanted_by_itself_is" TEXT, -- The number
    "unwanted_by_itself_source" TEXT, -- Where the number comes from
    "unwanted_by_itself_note" TEXT, -- Anything else
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "type_unwanted_per_event"( -- A number and where it comes from
    "type" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "is" TEXT, -- The number
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("type", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "element"( -- One part that protection depends on
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What it is
    "kind" TEXT, -- What sort of part it is
    "type" TEXT, -- The type whose data it shares
    "site" TEXT, -- Where it is
    "per_demand_is" TEXT, -- Probability of failure on demand
    "per_demand_prior" TEXT, -- Prior for the counts: beta(1/2, 1/2) or beta(1, 1)
    "per_demand_failures" INTEGER, -- Failures seen
    "per_demand_demands" INTEGER, -- Demands seen, failures among them
    "per_demand_source" TEXT, -- Where the number comes from
    "per_demand_note" TEXT, -- Anything else
    "undetected_is" TEXT, -- The number
    "undetected_source" TEXT, -- Where the number comes from
    "undetected_note" TEXT, -- Anything else
    "detected_is" TEXT, -- The number
    "detected_source" TEXT, -- Where the number comes from
    "detected_note" TEXT, -- Anything else
    "repair" TEXT, -- Time to repair once known
    "plant_out_while_repaired" INTEGER, -- Is the plant, not only the element, out of service during a repair?
    "out_of_service_is" TEXT, -- The number
    "out_of_service_source" TEXT, -- Where the number comes from
    "out_of_service_note" TEXT, -- Anything else
    "exercised" TEXT, -- Operations that show whether it works
    "since" TEXT, -- In service since
    "when_known" TEXT, -- Last known to be sound
    "test_every" TEXT, -- Interval of the routine test
    "test_last" TEXT, -- Day of the last test
    "test_next" TEXT, -- Day of the next planned test; the first whole number of intervals behind the last test that lies behind the day of evaluation where it is left out
    "test_takes" TEXT, -- Time out of service for a test
    "test_costs" TEXT, -- Cost of a test
    "test_finds" TEXT, -- Share of undetected failures that the test finds
    "test_leaves_failed" TEXT, -- Probability that the test leaves the element failed
    "test_trips" TEXT, -- Probability that the test trips the plant
    "test_source" TEXT, -- Where the number comes from
    "unwanted_by_itself_is" TEXT, -- The number
    "unwanted_by_itself_source" TEXT, -- Where the number comes from
    "unwanted_by_itself_note" TEXT, -- Anything else
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "element_revealed_by"( -- Hazards that call on it, after each of which a failure is found and mended
    "element" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("element", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "element_unwanted_per_event"( -- A number and where it comes from
    "element" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "is" TEXT, -- The number
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("element", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "common_cause"( -- Elements that fail from one cause
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What it is
    "beta" TEXT, -- Share of undetected failures with a common cause
    "beta_detected" TEXT, -- Share of detected failures with a common cause
    "found_by" TEXT, -- The element whose test finds the common failure
    "settings" INTEGER, -- Is the common cause a wrong setting?
    "staggered" INTEGER, -- Do the alpha factors come from staggered tests?
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "common_cause_of"( -- The elements that may fail together
    "common_cause" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("common_cause", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "common_cause_factors"( -- Alpha factor
    "common_cause" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT, -- Alpha factor
    PRIMARY KEY("common_cause", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "scheme"( -- How elements together perform one protection function
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What it is
    "site" TEXT, -- Where it is
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "scheme_member"( -- What must work for the function to operate
    "scheme" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "op" TEXT NOT NULL, -- name, all, any, at-least or absent
    "k" INTEGER, -- Of at-least: how many
    "name" TEXT, -- Element or scheme
    PRIMARY KEY("scheme", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "scheme_trip_member"( -- What makes it operate unwantedly, where the default does not fit
    "scheme" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "op" TEXT NOT NULL, -- name, all, any, at-least or absent
    "k" INTEGER, -- Of at-least: how many
    "name" TEXT, -- Element or scheme
    PRIMARY KEY("scheme", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "hazard"( -- An initiating event, how protection responds, what each outcome costs
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- The initiating event
    "site" TEXT, -- Where it is
    "owner" TEXT, -- Who answers for it (ISO 31000)
    "status" TEXT, -- Where its treatment stands
    "treatment" TEXT, -- What is being done about it
    "review" TEXT, -- When it is to be looked at again
    "frequency" TEXT, -- How often it occurs: any expression of rates
    "growth" TEXT, -- Growth per year
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "response_row"( -- One row of a hazard's response
    "hazard" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "cleared_by" TEXT, -- The scheme that clears the fault in this row
    "breaker_failure_of" TEXT, -- The row whose breaker this row backs up: it acts where that row's protection has operated and its breaker has not opened
    "in" TEXT, -- Clearance time
    "sees_is" TEXT, -- The number
    "sees_source" TEXT, -- Where the number comes from
    "sees_note" TEXT, -- Anything else
    "outcome" TEXT, -- The outcome that this ends in, or none
    "if_works" TEXT, -- A scheme or element that decides between yes and no
    PRIMARY KEY("hazard", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "branch"( -- A branch of the event tree (IEC 62502)
    "hazard" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "share" TEXT, -- Share of this branch, or rest
    "outcome" TEXT, -- The outcome that this ends in, or none
    "if_works" TEXT, -- A scheme or element that decides between yes and no
    PRIMARY KEY("hazard", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "outcome"( -- An end state of a hazard (IEC 62502)
    "hazard" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "name" TEXT, -- What has happened
    "note" TEXT, -- Anything else
    PRIMARY KEY("hazard", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "damage"( -- What one outcome costs, by category
    "hazard" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "name" TEXT, -- What is damaged
    "category" TEXT, -- Category of damage, such as equipment, crew or lost-load
    "is" TEXT, -- What it costs
    "varies" TEXT, -- What it costs, drawn anew at each occurrence
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("hazard", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "interruption"( -- Customers and load interrupted for a time
    "hazard" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "customers" INTEGER, -- Customers interrupted
    "load" TEXT, -- Load interrupted
    "for" TEXT, -- How long
    PRIMARY KEY("hazard", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "harm"( -- Harm to a group of people
    "hazard" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "present" TEXT, -- Probability that a given person of the group is there
    "death" TEXT, -- Probability of death of a person who is there
    "injury" TEXT, -- Probability of injury of a person who is there
    PRIMARY KEY("hazard", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "hazard_disables"( -- A number and where it comes from
    "hazard" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "is" TEXT, -- The number
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("hazard", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state"( -- A condition that is unknown, or an operating state
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What is in a state
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_is"( -- Share of this state
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- Share of this state
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_varies"( -- Share of this state
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- Share of this state
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_when"( -- A change
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_when_item"( -- A change
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "at" TEXT NOT NULL, -- Path in the register that is changed
    "value" TEXT NOT NULL, -- What is set there; no: removed
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_becomes"( -- Transitions to each state
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_becomes_item"( -- Transitions per year
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- Transitions per year
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_failures"( -- The state that each outcome leads to
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_failures_item"( -- The state that it enters
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- The state that it enters
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_renewed_by"( -- The state that it enters
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- The state that it enters
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_tests"( -- A survey that reads a state imperfectly
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "costs" TEXT, -- What the test costs
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_tests_reads"( -- What the test can read
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_tests_given"( -- Probabilities of the readings
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "state_tests_given_item"( -- Probability of each reading, in the order of reads
    "state" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT, -- Probability of each reading, in the order of reads
    PRIMARY KEY("state", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option"( -- A measure: what it costs and what it changes
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What would be done
    "site" TEXT, -- Where
    "owner" TEXT, -- Who answers for it
    "invest_is" TEXT, -- What it costs
    "invest_on" TEXT, -- When it is paid; at the start of the horizon where it is left out
    "invest_source" TEXT, -- Where the number comes from
    "invest_note" TEXT, -- Anything else
    "in_service" TEXT, -- When its benefit starts; the start of the horizon where it is left out
    "running_is" TEXT, -- The number
    "running_source" TEXT, -- Where the number comes from
    "running_note" TEXT, -- Anything else
    "life" TEXT, -- How long it lasts from its in-service date
    "renewed" INTEGER, -- Is it renewed at the end of its life?
    "residual" TEXT, -- What it is worth at the end of the horizon
    "early_for" TEXT, -- How long the commissioning period lasts
    "source" TEXT, -- Where the number comes from
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option_early_change"( -- What is different during it
    "option" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "at" TEXT NOT NULL, -- Path in the register that is changed
    "value" TEXT NOT NULL, -- What is set there; no: removed
    PRIMARY KEY("option", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option_excludes"( -- Options that cannot be combined with it
    "option" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("option", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option_requires"( -- Options without which it is not possible
    "option" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("option", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option_combine"( -- A change
    "option" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("option", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option_combine_item"( -- A change
    "option" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "at" TEXT NOT NULL, -- Path in the register that is changed
    "value" TEXT NOT NULL, -- What is set there; no: removed
    PRIMARY KEY("option", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option_resources"( -- How much
    "option" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- How much
    PRIMARY KEY("option", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "option_change"( -- What it changes in the register
    "option" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "at" TEXT NOT NULL, -- Path in the register that is changed
    "value" TEXT NOT NULL, -- What is set there; no: removed
    PRIMARY KEY("option", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "decision"( -- A question with its options or its tree
    "id" TEXT NOT NULL, -- Id of the object
    "question" TEXT, -- What is to be decided
    "owner" TEXT, -- Who decides
    "review" TEXT, -- When it is to be looked at again
    "every" TEXT, -- The choice comes again after this time
    "risk_tolerance" TEXT, -- Of exponential utility: the greater, the less a wide spread of damage counts
    "beliefs" INTEGER, -- Most beliefs about unknown states at one choice; 1000 where it is left out
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "decision_focus"( -- The hazards that the question is about
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "decision_options"( -- The options to weigh, beside doing nothing
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "decision_choose"( -- Steps in time
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "step"( -- A step of a decision tree
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "pay" TEXT, -- Pay money
    "wait" TEXT, -- Let time pass
    "apply" TEXT, -- Apply an option
    "inspect" TEXT, -- Inspect: STATE.TEST
    "go" TEXT, -- Go on with a named subtree
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "step_change"( -- Change the register
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "at" TEXT NOT NULL, -- Path in the register that is changed
    "value" TEXT NOT NULL, -- What is set there; no: removed
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "step_reads"( -- Steps in time
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "step_choose"( -- Steps in time
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "chance_branch"( -- A branch of chance
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "p" TEXT, -- Probability, or rest
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "decision_subtrees"( -- Steps in time
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "decision_sees"( -- States that are known at each choice
    "decision" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("decision", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "plan"( -- Options under yearly budgets
    "id" TEXT NOT NULL, -- Id of the object
    "name" TEXT, -- What the plan is for
    "note" TEXT, -- Anything else
    PRIMARY KEY("id")
) STRICT, WITHOUT ROWID;

CREATE TABLE "plan_budgets"( -- Money
    "plan" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- Money
    PRIMARY KEY("plan", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "plan_limits"( -- Amount
    "plan" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "key" TEXT NOT NULL, -- Name of the row
    "value" TEXT, -- Amount
    PRIMARY KEY("plan", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "plan_must"( -- Options that are settled
    "plan" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("plan", "path")
) STRICT, WITHOUT ROWID;

CREATE TABLE "plan_options"( -- Options to choose among; all where it is left out
    "plan" TEXT NOT NULL, -- Id of the object
    "path" TEXT NOT NULL, -- Where in the object it stands
    "within" TEXT NOT NULL, -- Path of the row that it stands in; empty: none
    "position" INTEGER NOT NULL, -- Place in the list, from 0
    "value" TEXT NOT NULL, -- Name in the set
    PRIMARY KEY("plan", "path")
) STRICT, WITHOUT ROWID;
