/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the pages of a decision in several stages share. Private to src/work. */
#ifndef WORK_BRANCHING_H
#define WORK_BRANCHING_H

#include "decide/branching.h"
#include "work/work.h"

/* --- words (branching_words.c) --- */

/* "apply NEW-T2", "go on as it is": what is done behind a reading or an outcome of chance, as far
 * as the next reading or chance. */
const char *way_words(struct job *j, const struct branching *b, const struct way *x);
/* "choose renew: apply NEW-T2": with what that comes to. */
const char *way_words_long(struct job *j, const struct branching *b, const struct way *x);
/* "After a reading \"good\" of T2-WINDING.OIL (69 %) keep, after \"poor\" (31 %) renew." What
 * follows at once behind a branch: "" where nothing does. */
const char *following_sentence(struct job *j, const struct branching *b, const struct way *x);
/* A probability in a sentence: "69 %". */

/* The branch of the first choice that an alternative begins with; NULL where there is none, or
 * where it depends on what is seen. */
const struct way *first_way(const struct branching *b, const struct alternative *x);

/* --- pictures and tables --- */

void part_tree(struct job *j, const struct weighing *w);     /* branching_tree.c */
void part_readings(struct job *j, const struct weighing *w); /* branching_tree.c */

/* What it may come to (branching_profile.c); nothing where that is certain. */
void part_profile(struct job *j, const struct weighing *w);

/* Choices that come again (branching_policy.c): the picture and when to act; in a sentence. */
void part_policy(struct job *j, const struct weighing *w);
const char *policy_sentence(struct job *j, const struct weighing *w);

#endif
