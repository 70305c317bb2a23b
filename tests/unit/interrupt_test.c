/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The tool and interrupts: the first one while samples are taken ends the sampling behind a batch,
 * with a status of its own and a report that says after how many; the second one, and one before,
 * kills as usual. An interrupt is sent as soon as the kernel says that the tool catches it: nothing
 * waits for a time. */
#include <check.h>
#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include <ohmen/ohmen.h>

#include "sample.h"

static const char *tool;
static struct arena *arena;
static const char *folder;

/* A frequency of two unknown values, and more batches than are ever taken. */
static const char document[] =
    "register: {title: T, currency: EUR, prices: 2026, horizon: 1 a, discount: 0 % per a}\n"
    "values: {X: {is: 90 % within 1 per a .. 4 per a}, Y: {is: 90 % within 1 .. 4}}\n"
    "hazards: {H: {name: H, frequency: X * Y, response: {never: {outcome: lost}}, outcomes: {lost: "
    "{name: Lost, damage: {loss: {category: c, is: 3 EUR}}}}}, K: {name: K, frequency: X, "
    "response: "
    "{never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: 1 "
    "EUR}}}}}}\n"
    "options: {A: {name: A, invest: 1 EUR, change: {hazards: {H: {frequency: 0.5 * was}}}}}\n"
    "decisions: {D: {question: What?, options: [A]}}\n";
static const char *const many[] = {"ohmen",   "explain",     "H.frequency[p95]", "--samples",
                                   "1048576", "--precision", "0.0000001 %",      "--width",
                                   "200",     NULL};
static const char *const once[] = {
    "ohmen", "explain", "H.frequency[p95]", "--width", "200", "--samples", "1024", NULL};

static void put(const char *name, const char *text)
{
    FILE *f = fopen(name, "wb");
    ck_assert_ptr_nonnull(f);
    ck_assert_int_ge(fputs(text, f), 0);
    ck_assert_int_eq(fclose(f), 0);
}

static char *get(const char *name)
{
    enum { MOST = 1 << 16 };
    char *text = NEW_ARRAY(arena, MOST, char);
    FILE *f = fopen(name, "rb");
    ck_assert_ptr_nonnull(f);
    text[fread(text, 1, MOST - 1, f)] = 0;
    fclose(f);
    return text;
}

static void redirect(const char *name, int to)
{
    int file = open(name, O_WRONLY | O_CREAT | O_TRUNC, 0600);
    if (file < 0 || dup2(file, to) < 0)
        _exit(99);
}

/* Interrupts end it, whatever our own caller has set. It has become the tool when this returns: the
 * pipe ends with what was there before. */
static pid_t begin(const char *const *arguments)
{
    int ends[2];
    char none;
    ck_assert_int_eq(pipe(ends), 0);
    fcntl(ends[1], F_SETFD, FD_CLOEXEC);
    pid_t pid = fork();
    if (pid == 0) {
        signal(SIGINT, SIG_DFL);
        redirect("out", STDOUT_FILENO);
        redirect("err", STDERR_FILENO);
        setenv("OHMEN_REGISTER", "r.ohmen", 1);
        execv(tool, (char *const *)arguments);
        _exit(99);
    }
    close(ends[1]);
    ck_assert_int_eq(read(ends[0], &none, 1), 0);
    close(ends[0]);
    return pid;
}

/* Does the process catch interrupts now, by the mask that the kernel shows? */
static bool catches(pid_t pid)
{
    char name[64], line[256];
    unsigned long mask = 0;
    snprintf(name, sizeof name, "/proc/%d/status", (int)pid);
    FILE *f = fopen(name, "r");
    while (f && fgets(line, sizeof line, f))
        if (strncmp(line, "SigCgt:", 7) == 0)
            mask = strtoul(line + 7, NULL, 16);
    if (f)
        fclose(f);
    return mask >> (SIGINT - 1) & 1;
}

/* It ends by itself when it was not interrupted: then the test failed. */
static void wait_until_it_catches(pid_t pid)
{
    int status;
    while (!catches(pid))
        ck_assert_msg(waitpid(pid, &status, WNOHANG) == 0, "it ended by itself: %s", get("err"));
}

/* Of one that has ended and waits for us the kernel shows an empty mask. */
static void wait_until_it_does_not(pid_t pid)
{
    while (catches(pid))
        ;
}

static int end(pid_t pid)
{
    int status;
    ck_assert_int_eq(waitpid(pid, &status, 0), pid);
    return status;
}

static void setup(void)
{
    arena = arena_new(NULL);
    folder = sample_folder(arena);
    ck_assert_int_eq(chdir(folder), 0);
    put("d.yaml", document);
    static const char *const make[] = {"ohmen", "new", NULL};
    static const char *const import[] = {"ohmen", "import", "d.yaml", "--why",
                                         "w",     "--by",   "b",      NULL};
    ck_assert_int_eq(end(begin(make)), 0);
    ck_assert_int_eq(end(begin(import)), 0);
}

static void teardown(void)
{
    ck_assert_int_eq(chdir("/"), 0);
    arena_free(arena);
}

/* The number of batches that the report names. */
static unsigned long batches_of(const char *report)
{
    const char *at = strstr(report, "interrupted after ");
    ck_assert_msg(at != NULL, "%s", report);
    return strtoul(at + strlen("interrupted after "), NULL, 10);
}

START_TEST(first_interrupt_prints)
{
    pid_t pid = begin(many);
    wait_until_it_catches(pid);
    ck_assert_int_eq(kill(pid, SIGINT), 0);
    int status = end(pid);
    ck_assert_msg(WIFEXITED(status) && WEXITSTATUS(status) == ohmen_status_exit(OHMEN_INTERRUPTED),
                  "status %x", (unsigned)status);
    const char *report = get("out");
    unsigned long batches = batches_of(report);
    ck_assert_uint_ge(batches, 1);
    ck_assert_uint_lt(batches, 1024);
    ck_assert_ptr_nonnull(strstr(report, " of 1024 batches"));
    ck_assert_ptr_nonnull(strstr(get("err"), "the sampling was interrupted"));
    /* One batch is what so many samples are: the same bytes, but for the words. */
    if (batches > 1)
        return;
    ck_assert_int_eq(end(begin(once)), 0);
    size_t n = strcspn(report, ";");
    ck_assert_int_eq(strncmp(report, get("out"), n), 0);
}
END_TEST

START_TEST(second_interrupt_kills)
{
    pid_t pid = begin(many);
    wait_until_it_catches(pid);
    ck_assert_int_eq(kill(pid, SIGINT), 0);
    wait_until_it_does_not(pid);
    ck_assert_int_eq(kill(pid, SIGINT), 0);
    int status = end(pid);
    ck_assert(WIFSIGNALED(status) ? WTERMSIG(status) == SIGINT
                                  : WEXITSTATUS(status) == ohmen_status_exit(OHMEN_INTERRUPTED));
}
END_TEST

/* ---- the library ---- */

/* Says yes when it is asked for the n-th time, and from then on. */
struct patience {
    unsigned asked, most;
};

static bool stop(void *ctx)
{
    struct patience *p = ctx;
    return ++p->asked >= p->most;
}

/* The report of all as JSON when it is stopped so; it has the clock of the seam. */
static const char *stopped(unsigned most, ohmen_status expected)
{
    struct patience p = {0, most};
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *reg = NULL;
    ohmen_report *report = NULL;
    ohmen_query query = ohmen_query_defaults();
    query.samples = 4096;
    query.precision = "0.0000001 %";
    ck_assert_int_eq(ohmen_open("r.ohmen", OHMEN_READ, &reg, &e), OHMEN_OK);
    ohmen_stop_when(reg, stop, &p);
    ck_assert_int_eq(ohmen_report_all(reg, &query, &report, &e), expected);
    ck_assert_ptr_nonnull(report);
    const char *json = arena_str(arena, ohmen_report_json(report));
    ohmen_report_free(report);
    ohmen_close(reg);
    return json;
}

static bool says(const char *report, const char *words)
{
    return strstr(report, words) != NULL;
}

/* Two hazards are two samples of four batches each; their sum has one of its own. Behind the one
 * that was interrupted none is begun; the decision has as small a sample as can be. */
START_TEST(the_report_says_what_is_missing)
{
    const char *whole = stopped(1000, OHMEN_OK);
    ck_assert(says(whole, "4096 samples in 64 independent sets of 64"));
    ck_assert(!says(whole, "interrupted"));
    const char *first = stopped(1, OHMEN_INTERRUPTED), *again = stopped(1, OHMEN_INTERRUPTED);
    ck_assert_str_eq(first, again);
    ck_assert(says(first, "interrupted after 1 of 4 batches"));
    ck_assert(says(first, "H.risk[p95]") && !says(first, "K.risk[p95]"));
    ck_assert(says(first, "before 3 figures could be sampled"));
    ck_assert(says(first,
                   "256 samples in 16 independent sets of 16 scrambled points, seed 1; as few "
                   "as can be, since the sampling was interrupted before"));
    const char *later = stopped(6, OHMEN_INTERRUPTED);
    ck_assert(says(later, "the fewest 2048 samples") && says(later, "the most 4096 samples"));
    ck_assert(says(later, "interrupted after 2 of 4 batches"));
    ck_assert(says(later, "K.risk[p95]") && says(later, "before 1 figure could be sampled"));
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2)
        return EXIT_FAILURE;
    tool = argv[1];
    setenv("OHMEN_CLOCK", "2026-12-01T08:00:00Z", 1);
    Suite *suite = suite_create("interrupts");
    TCase *t = tcase_create("interrupts");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_set_timeout(t, 120);
    tcase_add_test(t, first_interrupt_prints);
    tcase_add_test(t, second_interrupt_kills);
    tcase_add_test(t, the_report_says_what_is_missing);
    suite_add_tcase(suite, t);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), ran = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || !ran ? EXIT_FAILURE : EXIT_SUCCESS;
}
