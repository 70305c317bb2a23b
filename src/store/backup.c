/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A copy of a register in use: SQLite's online backup in one step, which sees one state
 * of the file, into a part that gets its name once it is proved. Owns the part, which
 * is removed whatever happens. */
#include <sys/stat.h>

#include "store/projection.h"

static ohmen_status copy_pages(struct store *s, const char *part, ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    struct base to;
    ohmen_status status = store_new_base(a, s->vfs, part, &to, e);
    if (status == OHMEN_OK) {
        sqlite3_backup *copy = sqlite3_backup_init(to.db, "main", s->base.db, "main");
        int code = copy ? sqlite3_backup_step(copy, -1) : sqlite3_errcode(to.db);
        int end = sqlite3_backup_finish(copy);
        if (code != SQLITE_DONE)
            status = query_error(&to, end != SQLITE_OK ? end : code, e);
    }
    if (status == OHMEN_OK)
        status = store_checkpoint(&to, e);
    arena_free(a);
    return status;
}

static ohmen_status prove(struct store *s, const char *part, ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    struct store *copy;
    struct store_findings findings = {0};
    ohmen_status status = store_open_on(s->vfs, a, part, STORE_WRITE, &copy, e);
    if (status == OHMEN_OK)
        status = store_verify(copy, &findings, e);
    if (status == OHMEN_OK && findings.n > 0)
        status = error_set(e, OHMEN_REGISTER, "the copy of %s is not sound: %s", s->base.name,
                           findings.at[0]);
    arena_free(a);
    return status;
}

ohmen_status store_backup(struct store *s, const char *path, ohmen_error *e)
{
    struct stat st;
    if (lstat(path, &st) == 0)
        return error_set(e, OHMEN_IO, "cannot make %s: a file of this name exists", path);
    ohmen_status status = place_check(s->arena, path, path, e);
    if (status == OHMEN_OK)
        status = place_writable(s->arena, path, e);
    if (status != OHMEN_OK)
        return status;
    struct arena *a = arena_child(s->arena);
    const char *part = place_part(a, path);
    status = copy_pages(s, part, e);
    if (status == OHMEN_OK)
        status = prove(s, part, e);
    if (status == OHMEN_OK)
        status = place_publish(a, part, path, e);
    arena_free(a);
    return status;
}
