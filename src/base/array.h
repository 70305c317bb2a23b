/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Growable arrays in an arena. The element pointers move when the array grows.
 *
 *     ARRAY(double) xs = {0};
 *     *array_push(arena, &xs) = 2.385;     // a new zeroed element
 *     for (size_t i = 0; i < xs.n; i++) use(xs.at[i]);
 *
 * Named array types for parameters: `struct doubles ARRAY_BODY(double);` */
#ifndef BASE_ARRAY_H
#define BASE_ARRAY_H

#include "base/arena.h"

#define ARRAY_BODY(T) \
    {                 \
        T *at;        \
        size_t n, cap; \
    }
#define ARRAY(T) struct ARRAY_BODY(T)

/* Makes room for `more` further elements of `size` bytes; returns the (moved) base. */
void *array_room(struct arena *a, void *at, size_t n, size_t *cap, size_t more, size_t size);

/* Zeroes n bytes: room may hold what stood there before the array was cut shorter. */
void array_zero(void *p, size_t n);

#define array_reserve(arena, arr, more) \
    ((arr)->at = array_room((arena), (arr)->at, (arr)->n, &(arr)->cap, (more), sizeof *(arr)->at))

/* A pointer to a new, zeroed last element. */
#define array_push(arena, arr)                                                       \
    (array_reserve((arena), (arr), 1), array_zero(&(arr)->at[(arr)->n], sizeof *(arr)->at), \
     &(arr)->at[(arr)->n++])

#define array_last(arr) (&(arr)->at[(arr)->n - 1])

#endif
