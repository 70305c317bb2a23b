/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is supplied from a site, for interruptions that say nothing else: a row with neither
 * customers nor load interrupts all that the hazard's site supplies, or the nearest site above it
 * that states customers or load. Both are taken from that one site, since the load of a larger
 * site would not be that of these customers. */
#ifndef MODEL_SUPPLIED_H
#define MODEL_SUPPLIED_H

#include "model/model.h"

/* Does the row give neither customers nor load? */
bool interruption_is_whole(const struct interruption *row);

/* Has the hazard such a row? Then it depends on its site. */
bool hazard_needs_site(const struct hazard *h);

/* The site, or the nearest above it, that states customers or load; NULL: none. `site` may be
 * NULL. */
const struct object *model_supplied(const struct model *m, const char *site);

/* walk_references of an object of a kind; its site traces nothing where the hazard needs it. */
void kind_references(struct arena *a, enum kind kind, const struct node *node, const void *data,
                     struct references *out);

#endif
