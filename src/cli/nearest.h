/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The nearest of a list of names, for "did you mean". */
#ifndef CLI_NEAREST_H
#define CLI_NEAREST_H

struct spelling {
    const char *wanted; /* set by the caller */
    const char *name;   /* the nearest name offered so far, NULL: none is near */
    unsigned distance;
};

/* Offers one name. Near is a name that takes at most one slip for each three letters
 * of the longer one: a letter missing, too much or wrong, or two neighbours changed
 * (edit distance of Damerau in its restricted form); capitals count as small letters.
 * Of equally near names the first one offered stays. */
void spelling_offer(struct spelling *n, const char *name);

#endif
