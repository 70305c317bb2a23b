/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reading a whole file with a stated limit, writing one all or nothing. */
#ifndef BASE_FILE_H
#define BASE_FILE_H

#include "base/arena.h"
#include "base/error.h"

/* Reads a file ("-" is standard input) into the arena; *text gets a zero byte
 * behind its n bytes. More than `limit` bytes, a folder, or an unreadable file
 * is an error that names the file. */
ohmen_status file_read(struct arena *a, const char *name, size_t limit, char **text, size_t *n,
                       ohmen_error *e);

/* Writes a file by way of a new one beside it that is renamed once it is whole
 * and on the disk: the old content or the new, never a part. */
ohmen_status file_write(const char *name, const char *text, size_t n, ohmen_error *e);

#endif
