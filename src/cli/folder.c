/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Writing two files at once: each is written whole beside its place under another
 * name, then both are renamed; what was there before is kept under a third name until
 * both are in place. Owns the folder's descriptor and these names for the length of a
 * call. Invariant: whatever step fails, the steps before it are undone. */
#include "cli/folder.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "cli/message.h"

enum { NAME_SIZE = 64 };

/* One file on its way. */
struct passage {
    const struct folder_file *file;
    char part[NAME_SIZE], old[NAME_SIZE];
    bool has_part, has_old, in_place;
};

static int write_all(int fd, const char *text)
{
    size_t n = strlen(text);
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

/* The steps return 0 or the error's number. */

static int write_part(int folder, struct passage *p)
{
    int fd = openat(folder, p->part, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
    if (fd < 0)
        return errno;
    p->has_part = true;
    int why = write_all(fd, p->file->text) == 0 ? 0 : errno;
    if (close(fd) != 0 && !why)
        why = errno;
    return why;
}

/* A second link keeps the old file; where the file system has no links, its name
 * moves away for a moment. */
static int keep_old(int folder, struct passage *p)
{
    struct stat info;
    if (fstatat(folder, p->file->name, &info, AT_SYMLINK_NOFOLLOW) != 0)
        return errno == ENOENT ? 0 : errno;
    if (S_ISDIR(info.st_mode))
        return EISDIR;
    if (linkat(folder, p->file->name, folder, p->old, 0) != 0 &&
        renameat(folder, p->file->name, folder, p->old) != 0)
        return errno;
    p->has_old = true;
    return 0;
}

static int put_in_place(int folder, struct passage *p)
{
    int why = keep_old(folder, p);
    if (why)
        return why;
    if (renameat(folder, p->part, folder, p->file->name) != 0)
        return errno;
    p->has_part = false;
    p->in_place = true;
    return 0;
}

static void undo(int folder, struct passage *p)
{
    if (p->has_part)
        unlinkat(folder, p->part, 0);
    if (p->in_place && !p->has_old)
        unlinkat(folder, p->file->name, 0);
    if (p->has_old) {
        renameat(folder, p->old, folder, p->file->name);
        unlinkat(folder, p->old, 0); /* two links of one file: the renaming did nothing */
    }
}

static int write_both(int folder, struct passage *passages)
{
    int why = 0;
    for (int i = 0; i < FOLDER_FILES && !why; i++)
        why = write_part(folder, &passages[i]);
    for (int i = 0; i < FOLDER_FILES && !why; i++)
        why = put_in_place(folder, &passages[i]);
    if (!why && fsync(folder) != 0 && errno != EINVAL)
        why = errno;
    for (int i = FOLDER_FILES - 1; i >= 0; i--) {
        if (why)
            undo(folder, &passages[i]);
        else if (passages[i].has_old)
            unlinkat(folder, passages[i].old, 0);
    }
    return why;
}

static void passages_init(struct passage *passages, const struct folder_file *files)
{
    for (int i = 0; i < FOLDER_FILES; i++) {
        struct passage *p = &passages[i];
        *p = (struct passage){.file = &files[i]};
        snprintf(p->part, NAME_SIZE, "%s.part-%ld", files[i].name, (long)getpid());
        snprintf(p->old, NAME_SIZE, "%s.old-%ld", files[i].name, (long)getpid());
    }
}

ohmen_status folder_write(const char *path, const struct folder_file files[FOLDER_FILES],
                          ohmen_error *e)
{
    struct passage passages[FOLDER_FILES];
    passages_init(passages, files);
    bool made = mkdir(path, 0777) == 0;
    if (!made && errno != EEXIST)
        return message_set(e, OHMEN_IO, "cannot make the folder %s: %s", path, strerror(errno));
    int folder = open(path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    int why = folder < 0 ? errno : write_both(folder, passages);
    if (folder >= 0)
        close(folder);
    if (why && made)
        rmdir(path);
    if (why)
        return message_set(e, OHMEN_IO, "cannot write %s and %s into %s: %s", files[0].name,
                           files[1].name, path, strerror(why));
    return OHMEN_OK;
}
