/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What options settle with each other. Private to src/model. */
#ifndef MODEL_COMBINATION_H
#define MODEL_COMBINATION_H

#include "doc/patch.h"
#include "model/model.h"

struct change_list ARRAY_BODY(struct model_change);

/* The changes, each option's without what the combinations with other options among them settle;
 * behind them the combinations, named "A+B". */
void combination_settle(struct arena *a, const struct model *base, const struct patch_rules *rules,
                        size_t n, const struct model_change *changes, struct change_list *out);

/* Do two options contradict beyond what they settle with each other? The path, or NULL. */
const char *combination_contradiction(struct arena *a, const struct model *base,
                                      const struct patch_rules *rules, const char *p,
                                      const char *q);

#endif
