/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whole files. Owns the descriptors for the length of one call. */
#include "base/file.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/text.h"

/* Reads until the end or until more than `limit` bytes are there. */
static ohmen_status read_all(int fd, const char *name, size_t limit, struct text *t, ohmen_error *e)
{
    char buffer[16384];
    for (;;) {
        ssize_t n = read(fd, buffer, sizeof buffer);
        if (n == 0)
            return OHMEN_OK;
        if (n < 0 && errno == EINTR)
            continue;
        if (n < 0)
            return error_set(e, OHMEN_IO, "cannot read %s: %s", name, error_system(errno));
        text_addn(t, buffer, (size_t)n);
        if (t->n > limit)
            return error_set(e, OHMEN_INPUT, "%s is larger than %zu bytes, the most that is read",
                             name, limit);
    }
}

static void close_descriptor(void *fd)
{
    close((int)(intptr_t)fd);
}

ohmen_status file_read(struct arena *a, const char *name, size_t limit, char **text, size_t *n,
                       ohmen_error *e)
{
    int fd = STDIN_FILENO;
    struct arena *scratch = arena_child(a);
    if (!text_equal(name, "-")) {
        fd = open(name, O_RDONLY | O_CLOEXEC);
        if (fd < 0) {
            error_set(e, OHMEN_IO, "cannot open %s: %s", name, error_system(errno));
            arena_free(scratch);
            return OHMEN_IO;
        }
        arena_defer(scratch, close_descriptor, (void *)(intptr_t)fd);
    }
    struct text t;
    text_init(&t, scratch);
    ohmen_status status = read_all(fd, name, limit, &t, e);
    if (status == OHMEN_OK) {
        *text = arena_strn(a, text_str(&t), t.n);
        *n = t.n;
    }
    arena_free(scratch);
    return status;
}

static int write_all(int fd, const char *text, size_t n)
{
    while (n > 0) {
        ssize_t done = write(fd, text, n);
        if (done < 0 && errno == EINTR)
            continue;
        if (done < 0)
            return -1;
        text += done;
        n -= (size_t)done;
    }
    return fsync(fd);
}

enum { PART_NAME = 4096, PART_TRIES = 100 };

/* Opens a new file beside `name`; its own name goes to part[PART_NAME]. A part
 * that a killed process left behind is stepped over, never written to. Returns
 * -1 with errno set. */
static int open_part(const char *name, char *part)
{
    for (int i = 0; i < PART_TRIES; i++) {
        int len = snprintf(part, PART_NAME, "%s.part-%ld-%d", name, (long)getpid(), i);
        if (len < 0 || len >= PART_NAME) {
            errno = ENAMETOOLONG;
            return -1;
        }
        int fd = open(part, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
        if (fd >= 0 || errno != EEXIST)
            return fd;
    }
    return -1;
}

/* Writes, closes and renames; returns 0 or the first errno. */
static int fill_part(int fd, const char *part, const char *name, const char *text, size_t n)
{
    int why = write_all(fd, text, n) == 0 ? 0 : errno;
    if (close(fd) != 0 && !why)
        why = errno;
    if (!why && rename(part, name) != 0)
        why = errno;
    return why;
}

ohmen_status file_write(const char *name, const char *text, size_t n, ohmen_error *e)
{
    char part[PART_NAME];
    int fd = open_part(name, part);
    if (fd < 0)
        return error_set(e, OHMEN_IO, "cannot write %s: %s", name, error_system(errno));
    int why = fill_part(fd, part, name, text, n);
    if (!why)
        return OHMEN_OK;
    unlink(part);
    return error_set(e, OHMEN_IO, "cannot write %s: %s", name, error_system(why));
}
