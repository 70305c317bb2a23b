/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Finding the register. Owns the open folder for the length of one call. Invariant:
 * the answer and the order of names in a message do not depend on the order in which
 * the system lists a folder. */
#include "cli/locate.h"

#include <dirent.h>
#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "cli/message.h"

enum { NAMES_TOLD = 5 };

/* The first names in byte order, and how many there are. */
struct names {
    char at[NAMES_TOLD][LOCATE_NAME];
    size_t n;
};

const char *locate_named(const struct args *args)
{
    if (args->given[OPTION_REGISTER])
        return args->text[OPTION_REGISTER];
    const char *name = getenv("OHMEN_REGISTER");
    return name && *name ? name : NULL;
}

static bool is_register_name(const char *name)
{
    static const char suffix[] = ".ohmen";
    size_t n = strlen(name), m = sizeof suffix - 1;
    struct stat info;
    return n > m && n < LOCATE_NAME && name[0] != '.' && strcmp(name + n - m, suffix) == 0 &&
           stat(name, &info) == 0 && S_ISREG(info.st_mode);
}

/* Keeps the first NAMES_TOLD names in order. */
static void names_add(struct names *names, const char *name)
{
    size_t kept = names->n < NAMES_TOLD ? names->n : NAMES_TOLD, i = kept;
    names->n++;
    while (i > 0 && strcmp(names->at[i - 1], name) > 0) {
        if (i < NAMES_TOLD)
            memcpy(names->at[i], names->at[i - 1], LOCATE_NAME);
        i--;
    }
    if (i < NAMES_TOLD)
        snprintf(names->at[i], LOCATE_NAME, "%s", name);
}

static ohmen_status read_folder(struct names *names, ohmen_error *e)
{
    DIR *folder = opendir(".");
    if (!folder)
        return message_set(e, OHMEN_IO, "cannot read the current folder: %s", strerror(errno));
    const struct dirent *entry;
    while ((entry = readdir(folder)))
        if (is_register_name(entry->d_name))
            names_add(names, entry->d_name);
    closedir(folder);
    return OHMEN_OK;
}

static ohmen_status complain(const struct names *names, ohmen_error *e)
{
    if (names->n == 0)
        return message_set(e, OHMEN_USAGE,
                           "no register: the current folder holds no *.ohmen file; name one with "
                           "-r FILE or OHMEN_REGISTER, or create one with 'ohmen new FILE'");
    char list[NAMES_TOLD * (LOCATE_NAME + 2)] = "";
    for (size_t i = 0; i < names->n && i < NAMES_TOLD; i++) {
        size_t n = strlen(list);
        snprintf(list + n, sizeof list - n, "%s%s", i ? ", " : "", names->at[i]);
    }
    return message_set(e, OHMEN_USAGE,
                       "which register? the current folder holds %zu (%s%s); name one with "
                       "-r FILE or OHMEN_REGISTER",
                       names->n, list, names->n > NAMES_TOLD ? " ..." : "");
}

ohmen_status locate_register(const struct args *args, char found[LOCATE_NAME], const char **path,
                             ohmen_error *e)
{
    const char *named = locate_named(args);
    struct names names = {.n = 0};
    if (!named) {
        ohmen_status status = read_folder(&names, e);
        if (status != OHMEN_OK)
            return status;
        if (names.n != 1)
            return complain(&names, e);
        memcpy(found, names.at[0], LOCATE_NAME);
    }
    *path = named ? named : found;
    return OHMEN_OK;
}
