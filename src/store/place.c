/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where a register lies: refuses folders shared over a network, and gives finished
 * files their names. Owns no descriptor of a register: closing one would drop the
 * locks that SQLite holds on the same file. */
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <sys/stat.h>
#include <sys/sysmacros.h>
#include <unistd.h>

#include "base/file.h"
#include "base/text.h"
#include "store/internal.h"

bool place_is_network(const char *type)
{
    static const char *const shared[] = {"nfs",
                                         "nfs4",
                                         "cifs",
                                         "smb",
                                         "smb3",
                                         "smbfs",
                                         "ncpfs",
                                         "afs",
                                         "9p",
                                         "ceph",
                                         "lustre",
                                         "gfs2",
                                         "ocfs2",
                                         "coda",
                                         "fuse.sshfs",
                                         "davfs",
                                         "fuse.davfs2",
                                         "fuse.rclone",
                                         "fuse.glusterfs",
                                         "fuse.s3fs",
                                         "fuse.curlftpfs",
                                         NULL};
    for (size_t i = 0; shared[i]; i++)
        if (text_equal(shared[i], type))
            return true;
    return false;
}

const char *place_folder(struct arena *a, const char *path)
{
    const char *slash = strrchr(path, '/');
    if (!slash)
        return ".";
    return slash == path ? "/" : arena_strn(a, path, (size_t)(slash - path));
}

/* The type of file system in one line of mountinfo when it is that of the device
 * "major:minor"; else NULL. Fields: id parent major:minor root point options [tags]
 * - type source options (proc_pid_mountinfo(5)). */
static const char *type_in_line(struct arena *a, const char *line, size_t n, const char *device)
{
    const char *text = arena_strn(a, line, n);
    char id[16], parent[16], found[32];
    if (sscanf(text, "%15s %15s %31s", id, parent, found) != 3 || !text_equal(found, device))
        return NULL;
    const char *type = strstr(text, " - ");
    if (!type)
        return NULL;
    type += 3;
    return arena_strn(a, type, strcspn(type, " "));
}

static const char *type_of_device(struct arena *a, const char *mounts, const char *device)
{
    while (*mounts) {
        size_t n = strcspn(mounts, "\n");
        const char *type = type_in_line(a, mounts, n, device);
        if (type)
            return type;
        mounts += n + (mounts[n] == '\n');
    }
    return NULL;
}

/* The type of the file system that a path's folder lies on; NULL when it cannot be told. */
static const char *type_of_place(struct arena *a, const char *path)
{
    enum { MOUNTS_BYTES = 16 << 20 };
    struct stat st;
    char *mounts;
    size_t n;
    if (stat(place_folder(a, path), &st) != 0)
        return NULL;
    if (file_read(a, "/proc/self/mountinfo", MOUNTS_BYTES, &mounts, &n, NULL) != OHMEN_OK)
        return NULL;
    return type_of_device(a, mounts, arena_printf(a, "%u:%u", major(st.st_dev), minor(st.st_dev)));
}

ohmen_status place_check(struct arena *a, const char *path, const char *name, ohmen_error *e)
{
    struct arena *scratch = arena_child(a);
    const char *type = type_of_place(scratch, path);
    ohmen_status status = OHMEN_OK;
    if (type && place_is_network(type))
        status = error_set(e, OHMEN_IO,
                           "%s lies in a folder that is shared over a network (%s), where a "
                           "register is not safe; keep it on a local disk",
                           name, type);
    arena_free(scratch);
    return status;
}

ohmen_status place_writable(struct arena *a, const char *path, ohmen_error *e)
{
    if (access(place_folder(a, path), W_OK | X_OK) == 0)
        return OHMEN_OK;
    return error_set(e, OHMEN_IO, "cannot make %s: %s", path, error_system(errno));
}

static ohmen_status sync_folder(struct arena *a, const char *path, ohmen_error *e)
{
    const char *folder = place_folder(a, path);
    int fd = open(folder, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (fd < 0)
        return error_set(e, OHMEN_IO, "cannot open the folder %s: %s", folder, error_system(errno));
    int why = fsync(fd) == 0 ? 0 : errno;
    close(fd);
    if (why)
        return error_set(e, OHMEN_IO, "cannot write the folder %s: %s", folder, error_system(why));
    return OHMEN_OK;
}

int place_rename(const char *part, const char *path)
{
    int fd = open(path, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
    if (fd < 0)
        return errno;
    close(fd); /* of the claim, which is no register and on which SQLite has no locks */
    return rename(part, path) == 0 ? 0 : errno;
}

/* A link never replaces a file, which a rename would. 0 or the errno. */
static int give_name(const char *part, const char *path)
{
    if (link(part, path) == 0)
        return 0;
    bool no_links = errno == EPERM || errno == ENOSYS || errno == EOPNOTSUPP || errno == EMLINK;
    return no_links ? place_rename(part, path) : errno;
}

ohmen_status place_publish(struct arena *a, const char *part, const char *path, ohmen_error *e)
{
    int why = give_name(part, path);
    if (why == EEXIST)
        return error_set(e, OHMEN_IO, "cannot make %s: a file of this name exists", path);
    if (why)
        return error_set(e, OHMEN_IO, "cannot make %s: %s", path, error_system(why));
    return sync_folder(a, path, e);
}

static void remove_part(void *object)
{
    static const char *const ends[] = {"", "-wal", "-shm", "-journal"};
    for (size_t i = 0; i < sizeof ends / sizeof ends[0]; i++) {
        char name[4096];
        int n = snprintf(name, sizeof name, "%s%s", (const char *)object, ends[i]);
        if (n > 0 && (size_t)n < sizeof name)
            unlink(name);
    }
}

const char *place_part(struct arena *a, const char *path)
{
    for (int i = 0;; i++) {
        char *part = arena_printf(a, "%s.part-%ld-%d", path, (long)getpid(), i);
        struct stat st;
        if (lstat(part, &st) == 0)
            continue;
        arena_defer(a, remove_part, part);
        return part;
    }
}
