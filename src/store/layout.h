/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The enduring tables as SQL: schema/register.sql, compiled in by schema/embed.sh. */
#ifndef STORE_LAYOUT_H
#define STORE_LAYOUT_H

extern const char layout_sql[];

#endif
