/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Arenas: a list of chunks, each larger than the last, bump-allocated.
 *
 * Memory that is touched for the first time costs a fault of each of its pages, which may be more
 * than all that is done with it. So large blocks ask the system for large pages, where it has some.
 *
 * Owns its chunks and the list of deferred calls (which lives in the chunks).
 * Invariant: memory handed out is zero and stays where it is. */
#include "base/arena.h"

#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/mman.h>
#ifdef __GLIBC__
#include <malloc.h>
#endif

enum {
    ALIGN = 16,
    FIRST_CHUNK = 4096,
    LARGE_PAGE = 1 << 21,
    LARGEST_CHUNK = LARGE_PAGE,
    WORTH_A_PAGE = LARGE_PAGE / 4,
    BRIEF = 128
};

/* What a process keeps (mem_system_keep): blocks of up to the one, up to the other in all. The C
 * library takes no more for a block. */
enum { MOST_KEPT_BLOCK = 1 << 25, MOST_KEPT = 1 << 28 };

struct chunk {
    struct chunk *next;
    size_t size; /* of the whole chunk, this head included */
    size_t used;
    size_t pad;
};

struct deferred {
    struct deferred *next;
    void (*release)(void *);
    void *object;
};

struct arena {
    const struct mem *mem;
    struct chunk *chunks; /* newest first */
    struct deferred *deferred;
    jmp_buf *guard;
    struct arena *parent;
    struct arena *children, *next_child;
    size_t next_size;
};

/* Begins with a large page; its end takes one only where it fills a good part of it. */
static void *allocate_large(size_t n)
{
    void *p;
    if (n > SIZE_MAX - LARGE_PAGE)
        return NULL;
    size_t whole = (n + LARGE_PAGE - WORTH_A_PAGE) & ~(size_t)(LARGE_PAGE - 1);
    if (posix_memalign(&p, LARGE_PAGE, n > whole ? n : whole) != 0)
        return NULL;
#ifdef MADV_HUGEPAGE
    madvise(p, whole, MADV_HUGEPAGE); /* a wish: where it is refused the pages are small ones */
#endif
    return p;
}

static void *system_re(void *ctx, void *p, size_t old_size, size_t new_size)
{
    (void)ctx;
    (void)old_size;
    if (new_size == 0) {
        free(p);
        return NULL;
    }
    if (!p && new_size >= LARGE_PAGE)
        return allocate_large(new_size);
    return realloc(p, new_size);
}

const struct mem mem_system = {system_re, NULL};

void mem_system_keep(void)
{
#ifdef __GLIBC__
    mallopt(M_MMAP_THRESHOLD, MOST_KEPT_BLOCK);
    mallopt(M_TRIM_THRESHOLD, MOST_KEPT);
    mallopt(M_TOP_PAD, LARGE_PAGE);
#endif
}

static struct arena *arena_make(const struct mem *mem)
{
    struct arena *a = mem->re(mem->ctx, NULL, 0, sizeof *a);
    if (!a)
        return NULL;
    memset(a, 0, sizeof *a);
    a->mem = mem;
    a->next_size = FIRST_CHUNK;
    return a;
}

struct arena *arena_new(const struct mem *mem)
{
    return arena_make(mem ? mem : &mem_system);
}

struct arena *arena_child(struct arena *parent)
{
    struct arena *a = arena_make(parent->mem);
    if (!a)
        arena_exhausted(parent);
    a->parent = parent;
    a->next_child = parent->children;
    parent->children = a;
    return a;
}

static void unlink_from_parent(struct arena *a)
{
    if (!a->parent)
        return;
    struct arena **link = &a->parent->children;
    while (*link != a)
        link = &(*link)->next_child;
    *link = a->next_child;
}

void arena_free(struct arena *a)
{
    if (!a)
        return;
    while (a->children)
        arena_free(a->children);
    for (struct deferred *d = a->deferred; d; d = d->next)
        d->release(d->object);
    unlink_from_parent(a);
    for (struct chunk *c = a->chunks, *next; c; c = next) {
        next = c->next;
        a->mem->re(a->mem->ctx, c, c->size, 0);
    }
    a->mem->re(a->mem->ctx, a, sizeof *a, 0);
}

void arena_guard(struct arena *a, jmp_buf *guard)
{
    a->guard = guard;
}

const struct mem *arena_mem(const struct arena *a)
{
    return a->mem;
}

_Noreturn void arena_exhausted(struct arena *a)
{
    while (!a->guard && a->parent)
        a = a->parent;
    if (!a->guard)
        abort(); /* a programming error: an entry point without a guard */
    longjmp(*a->guard, 1);
}

/* A new chunk with room for `need` bytes, or NULL: the newest one, but where it is made to measure
 * it goes behind that, in which there may be room yet. */
static struct chunk *add_chunk(struct arena *a, size_t need)
{
    bool fits = a->next_size >= need + sizeof(struct chunk);
    size_t size = fits ? a->next_size : need + sizeof(struct chunk);
    struct chunk *c = a->mem->re(a->mem->ctx, NULL, 0, size);
    if (!c)
        return NULL;
    struct chunk **link = fits || !a->chunks ? &a->chunks : &a->chunks->next;
    c->size = size;
    c->used = sizeof *c;
    c->next = *link;
    *link = c;
    if (a->next_size < LARGEST_CHUNK)
        a->next_size *= 2;
    return c;
}

/* n zeroed bytes, or NULL when the seam fails. */
static void *try_alloc(struct arena *a, size_t n)
{
    if (n > SIZE_MAX / 2)
        return NULL;
    size_t need = (n + ALIGN - 1) & ~(size_t)(ALIGN - 1);
    struct chunk *c = a->chunks;
    if (!c || c->size - c->used < need)
        c = add_chunk(a, need);
    if (!c)
        return NULL;
    void *p = (char *)c + c->used;
    c->used += need;
    return n ? memset(p, 0, n) : p;
}

void *arena_alloc(struct arena *a, size_t n)
{
    void *p = try_alloc(a, n);
    if (!p)
        arena_exhausted(a);
    return p;
}

void *arena_array(struct arena *a, size_t count, size_t size)
{
    size_t bytes;
    if (__builtin_mul_overflow(count, size, &bytes))
        arena_exhausted(a);
    return arena_alloc(a, bytes);
}

void arena_defer(struct arena *a, void (*release)(void *object), void *object)
{
    struct deferred *d = try_alloc(a, sizeof *d);
    if (!d) {
        release(object); /* nobody else would */
        arena_exhausted(a);
    }
    d->release = release;
    d->object = object;
    d->next = a->deferred;
    a->deferred = d;
}

void *arena_copy(struct arena *a, const void *p, size_t n)
{
    void *copy = arena_alloc(a, n);
    return n ? memcpy(copy, p, n) : copy;
}

char *arena_strn(struct arena *a, const char *s, size_t n)
{
    char *copy = arena_alloc(a, n + 1);
    if (n)
        memcpy(copy, s, n);
    return copy;
}

char *arena_str(struct arena *a, const char *s)
{
    return arena_strn(a, s, strlen(s));
}

char *arena_vprintf(struct arena *a, const char *format, va_list args)
{
    va_list again;
    va_copy(again, args);
    char brief[BRIEF];
    int n = vsnprintf(brief, sizeof brief, format, args);
    if (n < 0)
        arena_exhausted(a); /* longer than INT_MAX, or a wide character without a form */
    char *s = arena_alloc(a, (size_t)n + 1);
    if (n < BRIEF)
        memcpy(s, brief, (size_t)n);
    else
        vsnprintf(s, (size_t)n + 1, format, again);
    va_end(again);
    return s;
}

char *arena_printf(struct arena *a, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    char *s = arena_vprintf(a, format, args);
    va_end(args);
    return s;
}
