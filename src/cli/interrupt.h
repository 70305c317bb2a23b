/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The first interrupt (SIGINT) while samples are taken: it ends the sampling behind the present
 * batch, and the report is printed of what there is. The second one, and one at any other time,
 * ends the process as usual. */
#ifndef CLI_INTERRUPT_H
#define CLI_INTERRUPT_H

#include <stdbool.h>
#include <stddef.h>

/* The phase that runs, as ohmen_progress tells it: interrupts are heeded in "sampling" alone. Where
 * they are ignored they stay so. */
void interrupt_follow(const char *phase, size_t done, size_t total);
/* Interrupts end the process again. */
void interrupt_end(void);

/* An ohmen_stop: whether there was an interrupt. */
bool interrupt_asked(void *ctx);

#endif
