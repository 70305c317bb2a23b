/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Two files written into a folder, both or neither. */
#ifndef CLI_FOLDER_H
#define CLI_FOLDER_H

#include <ohmen/ohmen.h>

enum { FOLDER_FILES = 2 };

struct folder_file {
    const char *name; /* within the folder */
    const char *text;
};

/* Writes the files into the folder, which is made if there is none (its parent must
 * exist). Files of these names are replaced; on failure (OHMEN_IO) they are as they
 * were, and a folder that was made is gone again. Each file is on the disk before the
 * first name changes, so that even a crash leaves whole files, old or new. */
ohmen_status folder_write(const char *path, const struct folder_file files[FOLDER_FILES],
                          ohmen_error *e);

#endif
