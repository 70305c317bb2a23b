/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where labels find room in a picture. Boxes are never covered; strokes are crossed only
 * where every place crosses one. All lengths are in the picture's own unit, y downwards. */
#ifndef REPORT_HTML_PLACE_H
#define REPORT_HTML_PLACE_H

#include <stdbool.h>

#include "base/array.h"

struct place_box {
    double x, y, width, height; /* x, y: of the upper left corner */
};

struct place_stroke {
    double x1, y1, x2, y2;
};

struct places {
    struct arena *arena;
    struct place_box bounds; /* labels stay inside */
    ARRAY(struct place_box) boxes;
    ARRAY(struct place_stroke) strokes;
};

void place_add_box(struct places *p, double x, double y, double width, double height);
void place_add_stroke(struct places *p, double x1, double y1, double x2, double y2);
bool place_is_free(const struct places *p, struct place_box b);
/* Finds room for a label of this size near the mark at x, y, which is at most `away` from
 * its centre, and keeps it: beside the mark, above, below, aslant, then further off. Of
 * places with as few crossed strokes the first one. False when there is none. */
bool place_label(struct places *p, double x, double y, double away, double width, double height,
                 struct place_box *found);

#endif
