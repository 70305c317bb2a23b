/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Parts of the tool that a golden case cannot reach: two files written into a folder,
 * both or neither, and the layout on a terminal. The rest of the tool is tested by its
 * golden cases. Works in a new folder. */
#include <check.h>
#include <dirent.h>
#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/ioctl.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <unistd.h>

#include "cli/folder.h"
#include "cli/layout.h"

/* The library's defaults, so that the test needs none of the library. */
ohmen_layout ohmen_layout_defaults(void)
{
    return (ohmen_layout){.width = 100};
}

static char start[4096], work[] = "cli-test-XXXXXX";

static void enter_folder(void)
{
    strcpy(work, "cli-test-XXXXXX");
    ck_assert_ptr_nonnull(getcwd(start, sizeof start));
    ck_assert_ptr_nonnull(mkdtemp(work));
    ck_assert_int_eq(chdir(work), 0);
}

/* Only what the tests know of is removed: anything else keeps the folder alive and so
 * fails the test. */
static void leave_folder(void)
{
    unlink("to/register.yaml");
    unlink("to/observations.csv");
    rmdir("to/observations.csv");
    rmdir("to");
    ck_assert_int_eq(chdir(start), 0);
    ck_assert_int_eq(rmdir(work), 0);
}

static void put(const char *name, const char *text)
{
    FILE *f = fopen(name, "wb");
    ck_assert_ptr_nonnull(f);
    ck_assert_int_ge(fputs(text, f), 0);
    ck_assert_int_eq(fclose(f), 0);
}

static void expect_content(const char *name, const char *expected)
{
    char text[256] = "";
    FILE *f = fopen(name, "rb");
    ck_assert_ptr_nonnull(f);
    text[fread(text, 1, sizeof text - 1, f)] = 0;
    fclose(f);
    ck_assert_str_eq(text, expected);
}

static int entries(const char *name)
{
    DIR *d = opendir(name);
    int n = 0;
    ck_assert_ptr_nonnull(d);
    for (const struct dirent *e; (e = readdir(d));)
        n += strcmp(e->d_name, ".") != 0 && strcmp(e->d_name, "..") != 0;
    closedir(d);
    return n;
}

static const struct folder_file new_files[FOLDER_FILES] = {{"register.yaml", "new objects\n"},
                                                           {"observations.csv", "new list\n"}};

static void expect_failure(const struct folder_file *files, const char *said)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(folder_write("to", files, &e), OHMEN_IO);
    ck_assert_int_eq(e.status, OHMEN_IO);
    ck_assert_ptr_nonnull(strstr(e.text, said));
}

static void put_old_files(void)
{
    ck_assert_int_eq(mkdir("to", 0777), 0);
    put("to/register.yaml", "old objects\n");
    put("to/observations.csv", "old list\n");
}

static void expect_files(const char *objects, const char *list)
{
    expect_content("to/register.yaml", objects);
    expect_content("to/observations.csv", list);
    ck_assert_int_eq(entries("to"), 2);
}

START_TEST(folder_is_made)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(folder_write("to", new_files, &e), OHMEN_OK);
    ck_assert_int_eq(e.status, OHMEN_OK);
    expect_files("new objects\n", "new list\n");
}
END_TEST

START_TEST(old_files_are_replaced)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    put_old_files();
    ck_assert_int_eq(folder_write("to", new_files, &e), OHMEN_OK);
    expect_files("new objects\n", "new list\n");
}
END_TEST

/* Writing to a file ends at `bytes`; the signal that would tell it is ignored, so that
 * the write fails instead. */
static void limit_files(rlim_t bytes, struct rlimit *before)
{
    signal(SIGXFSZ, SIG_IGN);
    ck_assert_int_eq(getrlimit(RLIMIT_FSIZE, before), 0);
    struct rlimit limit = {.rlim_cur = bytes, .rlim_max = before->rlim_max};
    ck_assert_int_eq(setrlimit(RLIMIT_FSIZE, &limit), 0);
}

/* The first file fits and the second does not. */
START_TEST(full_disk_keeps_old_files)
{
    const struct folder_file files[FOLDER_FILES] = {
        {"register.yaml", "short\n"}, {"observations.csv", "longer than the limit\n"}};
    struct rlimit before;
    put_old_files();
    limit_files(10, &before);
    expect_failure(files, "File too large");
    setrlimit(RLIMIT_FSIZE, &before);
    expect_files("old objects\n", "old list\n");
}
END_TEST

START_TEST(full_disk_leaves_no_new_folder)
{
    struct rlimit before;
    limit_files(3, &before);
    expect_failure(new_files, "File too large");
    setrlimit(RLIMIT_FSIZE, &before);
    ck_assert_int_eq(entries("."), 0);
}
END_TEST

/* The second name cannot be taken: the first file, already in its place, goes back. */
START_TEST(second_name_taken)
{
    ck_assert_int_eq(mkdir("to", 0777), 0);
    ck_assert_int_eq(mkdir("to/observations.csv", 0777), 0);
    expect_failure(new_files, "Is a directory");
    ck_assert_int_eq(entries("to"), 1);
    put("to/register.yaml", "old objects\n");
    expect_failure(new_files, "Is a directory");
    expect_content("to/register.yaml", "old objects\n");
    ck_assert_int_eq(entries("to"), 2);
}
END_TEST

START_TEST(no_folder_possible)
{
    put("to", "a file\n");
    expect_failure(new_files, "Not a directory");
    expect_content("to", "a file\n");
    unlink("to");
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(folder_write("no/where", new_files, &e), OHMEN_IO);
    ck_assert_ptr_nonnull(strstr(e.text, "no/where"));
    ck_assert_int_eq(entries("."), 0);
}
END_TEST

/* --- the layout --- */

/* What layout_choose says when standard output is a terminal of so many columns. */
static ohmen_layout on_terminal(unsigned short columns, const struct args *args)
{
    int master = posix_openpt(O_RDWR | O_NOCTTY);
    ck_assert_int_ge(master, 0);
    ck_assert_int_eq(grantpt(master), 0);
    ck_assert_int_eq(unlockpt(master), 0);
    int slave = open(ptsname(master), O_RDWR | O_NOCTTY);
    ck_assert_int_ge(slave, 0);
    struct winsize size = {.ws_row = 24, .ws_col = columns};
    ck_assert_int_eq(ioctl(slave, TIOCSWINSZ, &size), 0);
    fflush(stdout);
    int before = dup(STDOUT_FILENO);
    dup2(slave, STDOUT_FILENO);
    ohmen_layout layout = layout_choose(args);
    dup2(before, STDOUT_FILENO);
    close(before);
    close(slave);
    close(master);
    return layout;
}

static void clear_environment(void)
{
    unsetenv("COLUMNS");
    unsetenv("NO_COLOR");
}

START_TEST(width_of_terminal)
{
    static const struct {
        unsigned short columns;
        const char *variable;
        unsigned width;
    } cases[] = {
        {132, NULL, 132},  {59, NULL, 60},
        {60, NULL, 60},    {200, NULL, 200},
        {201, NULL, 200},  {0, NULL, 100},
        {132, "90", 90},   {132, "20", 60},
        {132, "", 132},    {132, "wide", 132},
        {132, "0", 132},   {132, "-5", 132},
        {132, "90x", 132}, {132, "99999999999999999999", 200},
    };
    const struct args args = {0};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        clear_environment();
        if (cases[i].variable)
            setenv("COLUMNS", cases[i].variable, 1);
        ck_assert_uint_eq(on_terminal(cases[i].columns, &args).width, cases[i].width);
    }
}
END_TEST

START_TEST(width_given)
{
    struct args args = {.given[OPTION_WIDTH] = true, .number[OPTION_WIDTH] = 77};
    setenv("COLUMNS", "90", 1);
    ck_assert_uint_eq(on_terminal(132, &args).width, 77);
}
END_TEST

START_TEST(colour_of_terminal)
{
    struct args args = {0};
    ck_assert(on_terminal(80, &args).colour);
    setenv("NO_COLOR", "", 1);
    ck_assert(on_terminal(80, &args).colour);
    setenv("NO_COLOR", "1", 1);
    ck_assert(!on_terminal(80, &args).colour);
    args.given[OPTION_COLOUR] = true;
    args.number[OPTION_COLOUR] = COLOUR_ALWAYS;
    ck_assert(on_terminal(80, &args).colour);
    unsetenv("NO_COLOR");
    args.number[OPTION_COLOUR] = COLOUR_NEVER;
    ck_assert(!on_terminal(80, &args).colour);
}
END_TEST

/* A file or a pipe has no width and no colour of its own, whatever COLUMNS says. */
START_TEST(no_terminal)
{
    const struct args args = {0};
    setenv("COLUMNS", "90", 1);
    fflush(stdout);
    int before = dup(STDOUT_FILENO), null = open("/dev/null", O_WRONLY);
    dup2(null, STDOUT_FILENO);
    ohmen_layout layout = layout_choose(&args);
    dup2(before, STDOUT_FILENO);
    close(before);
    close(null);
    ck_assert_uint_eq(layout.width, 100);
    ck_assert(!layout.colour);
}
END_TEST

static Suite *suite_folder(void)
{
    Suite *s = suite_create("folder");
    TCase *t = tcase_create("folder");
    tcase_add_checked_fixture(t, enter_folder, leave_folder);
    tcase_add_test(t, folder_is_made);
    tcase_add_test(t, old_files_are_replaced);
    tcase_add_test(t, full_disk_keeps_old_files);
    tcase_add_test(t, full_disk_leaves_no_new_folder);
    tcase_add_test(t, second_name_taken);
    tcase_add_test(t, no_folder_possible);
    suite_add_tcase(s, t);
    return s;
}

static Suite *suite_layout(void)
{
    Suite *s = suite_create("layout");
    TCase *t = tcase_create("layout");
    tcase_add_checked_fixture(t, clear_environment, clear_environment);
    tcase_add_test(t, width_of_terminal);
    tcase_add_test(t, width_given);
    tcase_add_test(t, colour_of_terminal);
    tcase_add_test(t, no_terminal);
    suite_add_tcase(s, t);
    return s;
}

int main(void)
{
    SRunner *sr = srunner_create(suite_folder());
    srunner_add_suite(sr, suite_layout());
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
