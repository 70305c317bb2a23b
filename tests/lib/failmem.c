/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The failing seam of the tests: malloc and free with a head before each block
 * and a guard behind it. Resizing always moves, so that a stale pointer shows.
 * Owns nothing beyond the blocks; failmem_check proves that they are gone. */
#include "failmem.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { GUARD = 16, FRESH = 0xA5, FREED = 0xDD };

/* 32 bytes, so that the block behind it keeps malloc's alignment. */
struct head {
    struct failmem *owner;
    size_t size;
    unsigned char guard[GUARD];
};

static _Noreturn void broken(const char *what)
{
    fprintf(stderr, "failmem: %s\n", what);
    abort();
}

static void check_block(const struct failmem *f, const struct head *h, size_t size)
{
    if (h->owner != f)
        broken("a block that this seam did not give out");
    if (h->size != size)
        broken("the size given back is not the size given out");
    const unsigned char *behind = (const unsigned char *)(h + 1) + size;
    for (size_t i = 0; i < GUARD; i++)
        if (h->guard[i] != FRESH || behind[i] != FRESH)
            broken("something wrote past the end of a block");
}

static void *give(struct failmem *f, size_t size)
{
    size_t number = f->allocations++;
    if (f->once ? number == f->fail_at : number >= f->fail_at) {
        f->failed++;
        return NULL;
    }
    struct head *h = malloc(sizeof *h + size + GUARD);
    if (!h)
        broken("the machine is out of memory");
    memset(h, FRESH, sizeof *h + size + GUARD);
    h->owner = f;
    h->size = size;
    f->blocks++;
    f->bytes += size;
    if (f->bytes > f->peak)
        f->peak = f->bytes;
    return h + 1;
}

static void take(struct failmem *f, void *p, size_t size)
{
    struct head *h = (struct head *)p - 1;
    check_block(f, h, size);
    memset(h, FREED, sizeof *h + size + GUARD);
    free(h);
    f->blocks--;
    f->bytes -= size;
}

static void *failmem_re(void *ctx, void *p, size_t old_size, size_t new_size)
{
    struct failmem *f = ctx;
    void *fresh = NULL;
    if (new_size > 0) {
        fresh = give(f, new_size);
        if (!fresh)
            return NULL;
        if (p)
            memcpy(fresh, p, old_size < new_size ? old_size : new_size);
    }
    if (p)
        take(f, p, old_size);
    return fresh;
}

void failmem_init(struct failmem *f, size_t fail_at)
{
    *f = (struct failmem){.mem = {failmem_re, f}, .fail_at = fail_at};
}

void failmem_check(const struct failmem *f)
{
    if (f->blocks == 0 && f->bytes == 0)
        return;
    fprintf(stderr, "failmem: %zu blocks of %zu bytes are still held\n", f->blocks, f->bytes);
    abort();
}
