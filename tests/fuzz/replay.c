/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A main for fuzz drivers: replays the seeds of a folder and a number of
 * deterministic mutations of them.
 *
 *     fuzz_yaml FOLDER COUNT            all seeds, then mutations 0 .. COUNT - 1
 *     fuzz_yaml FOLDER COUNT NUMBER     mutation NUMBER alone, printed first
 *
 * When an input breaks the driver, its number is told. Prints "N inputs replayed"
 * and fails when N is 0. */
#include <inttypes.h>
#include <signal.h>
#include <stdbool.h>
#include <string.h>

#include "fuzz.h"
#include "mutate.h"

/* The input in hand, for the signal handler alone. */
static char in_hand[256];

static void tell_input(int signal_number)
{
    (void)signal_number;
    fputs(in_hand, stderr);
    signal(SIGABRT, SIG_DFL);
}

/* Runs one input from a block of exactly its size, so that a sanitizer sees every
 * byte that is read beyond. */
static void run(const struct input *input)
{
    uint8_t *exact = malloc(input->n ? input->n : 1);
    REQUIRE(exact != NULL);
    memcpy(exact, input->bytes, input->n);
    LLVMFuzzerTestOneInput(exact, input->n);
    free(exact);
}

static void run_mutation(const struct corpus *c, uint64_t number, bool print)
{
    struct arena *a = fuzz_arena();
    struct input input = mutate(a, c, number);
    snprintf(in_hand, sizeof in_hand, "in mutation %" PRIu64 ", of seed %s\n", number, input.name);
    if (print) {
        fwrite(input.bytes, 1, input.n, stdout);
        fflush(stdout);
    }
    run(&input);
    arena_free(a);
}

static size_t run_all(const struct corpus *c, uint64_t count)
{
    for (size_t i = 0; i < c->n; i++) {
        snprintf(in_hand, sizeof in_hand, "in seed %s\n", c->seeds[i].name);
        run(&c->seeds[i]);
    }
    for (uint64_t i = 0; i < count; i++)
        run_mutation(c, i, false);
    return c->n + (size_t)count;
}

int main(int argc, char **argv)
{
    if (argc != 3 && argc != 4) {
        fprintf(stderr, "usage: %s FOLDER COUNT [NUMBER]\n", argv[0]);
        return EXIT_FAILURE;
    }
    signal(SIGABRT, tell_input);
    struct arena *a = fuzz_arena();
    struct corpus c = corpus_read(a, argv[1], fuzz_words);
    size_t replayed = 0;
    if (c.n > 0 && argc == 4) {
        run_mutation(&c, strtoull(argv[3], NULL, 10), true);
        replayed = 1;
    } else if (c.n > 0) {
        replayed = run_all(&c, strtoull(argv[2], NULL, 10));
    }
    arena_free(a);
    printf("%zu inputs replayed\n", replayed);
    return replayed > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
