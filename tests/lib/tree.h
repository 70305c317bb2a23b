/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random document trees with nasty texts, for round trips and patches. */
#ifndef TESTS_TREE_H
#define TESTS_TREE_H

#include "doc/node.h"
#include "random.h"

struct tree_wish {
    int depth;     /* of maps and lists below the root */
    bool typed;    /* counts, yes and no beside texts */
    bool controls; /* texts with control characters, which YAML refuses */
    bool tame;     /* short plain keys (a .. e), so that two trees share many */
};

/* A text in NFC that YAML, CSV or JSON could misread. */
const char *tree_text(struct arena *a, struct random *r, bool controls);

/* A random map. */
struct node *tree_random(struct arena *a, struct random *r, struct tree_wish wish);

#endif
