/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Standard output and its errors. Owns the flush at the end; buffering is stdio's. */
#include "cli/output.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "cli/message.h"

void output_guard_streams(void)
{
    for (int fd = STDIN_FILENO; fd <= STDERR_FILENO; fd++) {
        /* The wrong direction on purpose: a closed stream must stay unusable. */
        int direction = fd == STDIN_FILENO ? O_WRONLY : O_RDONLY;
        if (fcntl(fd, F_GETFD) == -1 && errno == EBADF && open("/dev/null", direction) != fd)
            return;
    }
}

static ohmen_status complain(int number, ohmen_error *e)
{
    return message_set(e, OHMEN_IO, "cannot write to standard output: %s", strerror(number));
}

ohmen_status output_text(const char *text, ohmen_error *e)
{
    errno = EIO;
    if (fputs(text, stdout) == EOF)
        return complain(errno, e);
    return OHMEN_OK;
}

ohmen_status output_finish(ohmen_error *e)
{
    errno = EIO; /* for an earlier failure, whose number is gone */
    if (fflush(stdout) != 0 || ferror(stdout))
        return complain(errno, e);
    return OHMEN_OK;
}
