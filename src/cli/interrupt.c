/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Interrupts (interrupt.h). Owns the disposition of SIGINT while samples are taken or unknowns are
 * looked at, and the flag that its handler sets. Invariant: once asked, the disposition is that of
 * before. */
#include "cli/interrupt.h"

#include <signal.h>
#include <string.h>

static volatile sig_atomic_t asked;
static bool installed;
static struct sigaction before;

/* The system has put the default disposition back (SA_RESETHAND). */
static void note(int number)
{
    (void)number;
    asked = 1;
}

static void install(void)
{
    struct sigaction now;
    if (installed || asked || sigaction(SIGINT, NULL, &before) != 0 || before.sa_handler == SIG_IGN)
        return;
    memset(&now, 0, sizeof now);
    sigemptyset(&now.sa_mask);
    now.sa_handler = note;
    now.sa_flags = (int)(SA_RESETHAND | SA_RESTART);
    installed = sigaction(SIGINT, &now, NULL) == 0;
}

void interrupt_end(void)
{
    if (installed)
        sigaction(SIGINT, &before, NULL);
    installed = false;
}

void interrupt_follow(const char *phase, size_t done, size_t total)
{
    bool can_end = strcmp(phase, "sampling") == 0 || strcmp(phase, "information") == 0;
    if (can_end && done < total)
        install();
    else
        interrupt_end();
}

bool interrupt_asked(void *ctx)
{
    (void)ctx;
    return asked != 0;
}
