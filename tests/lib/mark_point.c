/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What Check notes behind each check that holds. Owns nothing.
 *
 * Check writes the place of every check to a file, so that the parent of a forked test that
 * crashed can tell the last one. A million checks are a million system calls. Without forks
 * (CK_FORK=no) a crash ends the whole program and nobody reads the file: there it is not
 * written. Linked by -Wl,--wrap=_mark_point, see the head of tests/meson.build. */
#include <stdlib.h>
#include <string.h>

void __real__mark_point(const char *file, int line);
void __wrap__mark_point(const char *file, int line);

void __wrap__mark_point(const char *file, int line)
{
    static int forks = -1; /* not asked yet; the environment does not change during a run */
    if (forks < 0) {
        const char *wish = getenv("CK_FORK");
        forks = !wish || strcmp(wish, "no") != 0;
    }
    if (forks)
        __real__mark_point(file, line);
}
