/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Memory: one realloc-shaped seam, and arenas whose life is a phase.
 *
 * Invariant: all memory of ohmen comes through a `struct mem`. An arena hands
 * out zeroed, 16-byte aligned memory and frees everything at once.
 *
 * Allocation from an arena never returns NULL. When the seam fails, the arena
 * jumps to its guard (longjmp), which only the entry points of a use case set:
 *
 *     jmp_buf out_of_memory;
 *     struct arena *a = arena_new(mem);
 *     if (!a) return error_set(e, OHMEN_MEMORY, ...);
 *     if (setjmp(out_of_memory)) { arena_free(a); return error_set(...); }
 *     arena_guard(a, &out_of_memory);
 *
 * Whatever is not memory (a file, a database, a parser) is released by
 * arena_defer, which runs on arena_free and therefore also after a jump.
 * An arena belongs to one thread. */
#ifndef BASE_ARENA_H
#define BASE_ARENA_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

/* The seam. `re(ctx, NULL, 0, n)` allocates, `re(ctx, p, old, n)` resizes,
 * `re(ctx, p, old, 0)` frees and returns NULL. Returns NULL on failure and then
 * leaves p alone. */
struct mem {
    void *(*re)(void *ctx, void *p, size_t old_size, size_t new_size);
    void *ctx;
};

/* malloc, realloc and free. */
extern const struct mem mem_system;

/* For programs, not for libraries, before anything else: what is freed stays with the process for
 * what is asked for next, since pages that are given back cost a fault each when they come again.
 * Does nothing where the C library has no such thing. */
void mem_system_keep(void);

struct arena;

/* A new arena; `mem` is borrowed for its whole life, NULL means mem_system.
 * Returns NULL when memory is short. */
struct arena *arena_new(const struct mem *mem);

/* A child arena: the same seam and guard; freed with its parent or earlier by
 * arena_free. For scratch work of a stretch inside a phase. */
struct arena *arena_child(struct arena *parent);

/* Runs the deferred calls in reverse order, then frees all. Takes NULL. */
void arena_free(struct arena *a);

/* Where to go when memory runs out; children follow their parent's guard. */
void arena_guard(struct arena *a, jmp_buf *guard);

/* The seam that the arena draws from. */
const struct mem *arena_mem(const struct arena *a);

/* n zeroed bytes, aligned to 16. n may be 0. */
void *arena_alloc(struct arena *a, size_t n);

/* count * size zeroed bytes; an overflow is treated as out of memory. */
void *arena_array(struct arena *a, size_t count, size_t size);

/* Gives up: jumps to the guard as if memory had run out. For libraries that
 * report their own lack of memory. */
_Noreturn void arena_exhausted(struct arena *a);

/* Calls release(object) when the arena is freed. When there is no memory to
 * remember that, calls it at once and then jumps: the object is never lost. */
void arena_defer(struct arena *a, void (*release)(void *object), void *object);

/* Copies, and formatted text; the strings get a zero byte behind their n bytes.
 * What printf cannot format (more than INT_MAX bytes) is treated as out of memory. */
char *arena_str(struct arena *a, const char *s);
char *arena_strn(struct arena *a, const char *s, size_t n);
void *arena_copy(struct arena *a, const void *p, size_t n);
char *arena_printf(struct arena *a, const char *format, ...) __attribute__((format(printf, 2, 3)));
char *arena_vprintf(struct arena *a, const char *format, va_list args)
    __attribute__((format(printf, 2, 0)));

#define NEW(arena, T) ((T *)arena_alloc((arena), sizeof(T)))
#define NEW_ARRAY(arena, n, T) ((T *)arena_array((arena), (n), sizeof(T)))

#endif
