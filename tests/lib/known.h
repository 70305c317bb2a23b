/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What was found of a folder of files before, remembered by the bytes of all its files.
 *
 * The tests of failures prove a register at thousands of moments, but most moments leave one of
 * a few states behind. What opening a register and proving it says follows from the bytes of its
 * files and from nothing else, so that proving the same bytes again finds nothing new. Bytes are
 * told apart by BLAKE2b of 32 bytes over the name, length and content of each file; nobody can
 * make two states that collide, chance does not. That the verdict follows from the bytes is
 * itself tested: a state that is met for the second time is proven again, and must give the same
 * verdict; only from the third time on is it taken as known. */
#ifndef TESTS_KNOWN_H
#define TESTS_KNOWN_H

#include <stdbool.h>

#include "base/array.h"

enum { KNOWN_KEY = 32 };

struct known_state {
    unsigned char key[KNOWN_KEY];
    int verdict;
    unsigned times; /* that it was found */
};

struct known {
    struct arena *a;
    ARRAY(struct known_state) states;
};

/* The bytes of all files in `folder`. */
void known_key(const char *folder, unsigned char key[KNOWN_KEY]);

/* Whether the verdict on these bytes is certain by now; then it is in *verdict. */
bool known_certain(const struct known *k, const unsigned char key[KNOWN_KEY], int *verdict);

/* Notes what was found; ends the test where something else was found before. */
void known_note(struct known *k, const unsigned char key[KNOWN_KEY], int verdict);

#endif
