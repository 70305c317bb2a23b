/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What model.c and variant.c share. Private to src/model. */
#ifndef MODEL_VARIANT_H
#define MODEL_VARIANT_H

#include "model/bind.h"
#include "model/model.h"

/* Binds one object and collects its references; NULL with diagnostics. */
struct object *model_bind(struct binding *b, enum kind kind, const char *id,
                          const struct node *node);

#endif
