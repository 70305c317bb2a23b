/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the two halves of the audit share. Private to src/store/verify*.c. */
#ifndef STORE_VERIFY_H
#define STORE_VERIFY_H

#include "store/projection.h"

/* Findings beyond this number are counted, not kept. */
#define VERIFY_KEPT 1000

struct audit {
    struct store *s;
    struct arena *a; /* scratch */
    struct store_findings found;
    size_t count; /* of all findings */
    ohmen_error *e;
};

void audit_find(struct audit *v, const char *format, ...) __attribute__((format(printf, 2, 3)));

/* What a check ended with: damage that stopped it is a finding, the rest is an error. */
ohmen_status audit_outcome(struct audit *v, const char *what, ohmen_status status,
                           const ohmen_error *why);

/* Derived tables against a fresh derivation. */
ohmen_status audit_derived(struct audit *v);

#endif
