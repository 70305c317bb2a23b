/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of field tables share: how a row is written, and the tables that
 * other tables refer to. Private to src/model/tables_*.c. */
#ifndef MODEL_TABLES_H
#define MODEL_TABLES_H

#include "model/kinds.h"

#define COUNT_OF(a) (sizeof(a) / sizeof(a)[0])

/* One row: struct, member, key, type, then help and designated initialisers. */
#define F(T, member, key_, type_, ...)                                                             \
    {                                                                                              \
        .key = (key_), .type = FIELD_##type_, .offset = offsetof(T, member), .help = __VA_ARGS__   \
    }
/* The part of rows or of a list: type, then help and designated initialisers. */
#define PART(type_, ...)                                                                           \
    {                                                                                              \
        .type = FIELD_##type_, .help = __VA_ARGS__                                                 \
    }

#define TABLE(T, name_, fields_, ...)                                                              \
    {                                                                                              \
        .name = (name_), .size = sizeof(T), .fields = (fields_), .n_fields = COUNT_OF(fields_),    \
        .help = __VA_ARGS__                                                                        \
    }
#define GROUPS(groups_) .groups = (groups_), .n_groups = COUNT_OF(groups_)

extern const struct table table_probability, table_money_rate, table_rate_per_time,
    table_demand_record, table_test, table_unwanted;

extern const struct table table_register, table_source, table_site, table_group, table_value,
    table_rate, table_type, table_element, table_common_cause, table_scheme, table_hazard,
    table_state, table_option, table_decision, table_plan;

#endif
