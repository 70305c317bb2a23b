/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whole files: limits at and one past, what cannot be read or written, and that
 * a failed write leaves the old content and no rubbish. Works in a new folder. */
#include <dirent.h>
#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/file.h"
#include "base_test.h"
#include "failmem.h"

static char start[4096], folder[] = "base-file-XXXXXX";

static void enter_folder(void)
{
    strcpy(folder, "base-file-XXXXXX");
    ck_assert_ptr_nonnull(getcwd(start, sizeof start));
    ck_assert_ptr_nonnull(mkdtemp(folder));
    ck_assert_int_eq(chdir(folder), 0);
}

/* Removes what the tests may have left, then the folder, which must be empty. */
static void leave_folder(void)
{
    unlink("file");
    unlink("link");
    rmdir("sub");
    ck_assert_int_eq(chdir(start), 0);
    ck_assert_int_eq(rmdir(folder), 0);
}

static void put(const char *name, const char *text, size_t n)
{
    FILE *f = fopen(name, "wb");
    ck_assert_ptr_nonnull(f);
    ck_assert_uint_eq(fwrite(text, 1, n, f), n);
    ck_assert_int_eq(fclose(f), 0);
}

static void expect_content(const char *expected)
{
    struct arena *a = arena_new(NULL);
    char *text = NULL;
    size_t n = 0;
    ck_assert_int_eq(file_read(a, "file", 1000000, &text, &n, NULL), OHMEN_OK);
    ck_assert_uint_eq(n, strlen(expected));
    ck_assert_str_eq(text, expected);
    arena_free(a);
}

static int count_entries(void)
{
    DIR *d = opendir(".");
    int n = 0;
    while (readdir(d))
        n++;
    closedir(d);
    return n - 2; /* . and .. */
}

static int count_descriptors(void)
{
    int n = 0;
    for (int fd = 0; fd < 256; fd++)
        n += fcntl(fd, F_GETFD) != -1;
    return n;
}

START_TEST(limits_at_and_one_past)
{
    static const size_t sizes[] = {0, 1, 100, 16384, 16385, 50000};
    char *content = calloc(1, 50001);
    memset(content, 'c', 50000);
    content[0] = 0; /* zero bytes are content */
    struct arena *a = arena_new(NULL);
    size_t size = sizes[_i];
    put("file", content, size);
    char *text = NULL;
    size_t n = 7;
    ck_assert_int_eq(file_read(a, "file", size, &text, &n, NULL), OHMEN_OK);
    ck_assert_uint_eq(n, size);
    if (size)
        ck_assert_mem_eq(text, content, size);
    ck_assert_int_eq(text[n], 0);
    if (size) {
        ohmen_error e = OHMEN_ERROR_INIT;
        char *untouched = content;
        n = 7;
        ck_assert_int_eq(file_read(a, "file", size - 1, &untouched, &n, &e), OHMEN_INPUT);
        ck_assert_ptr_eq(untouched, content);
        ck_assert_uint_eq(n, 7);
        ck_assert_ptr_nonnull(strstr(e.text, "file is larger than"));
    }
    arena_free(a);
    free(content);
}
END_TEST

static void expect_unreadable(const char *name, const char *message)
{
    struct arena *a = arena_new(NULL);
    ohmen_error e = OHMEN_ERROR_INIT;
    char *text = NULL;
    size_t n = 7;
    ck_assert_int_eq(file_read(a, name, 100, &text, &n, &e), OHMEN_IO);
    ck_assert_str_eq(e.text, message);
    ck_assert_ptr_null(text);
    ck_assert_uint_eq(n, 7);
    arena_free(a);
}

START_TEST(what_cannot_be_read)
{
    int before = count_descriptors();
    ck_assert_int_eq(mkdir("sub", 0700), 0);
    expect_unreadable("none", "cannot open none: No such file or directory");
    expect_unreadable("sub", "cannot read sub: Is a directory");
    expect_unreadable("", "cannot open : No such file or directory");
    put("file", "x", 1);
    expect_unreadable("file/x", "cannot open file/x: Not a directory");
    ck_assert_int_eq(count_descriptors(), before);
}
END_TEST

START_TEST(minus_is_the_standard_input)
{
    put("file", "from the pipe", 13);
    int keep = dup(STDIN_FILENO), in = open("file", O_RDONLY);
    ck_assert_int_eq(dup2(in, STDIN_FILENO), STDIN_FILENO);
    close(in);
    struct arena *a = arena_new(NULL);
    char *text = NULL;
    size_t n = 0;
    ohmen_status status = file_read(a, "-", 13, &text, &n, NULL);
    ck_assert_int_ne(fcntl(STDIN_FILENO, F_GETFD), -1); /* still open */
    if (keep >= 0) {
        dup2(keep, STDIN_FILENO);
        close(keep);
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_str_eq(text, "from the pipe");
    arena_free(a);
}
END_TEST

static bool read_with(const struct mem *mem)
{
    jmp_buf guard;
    struct arena *a = arena_new(mem);
    if (!a)
        return false;
    if (setjmp(guard)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &guard);
    char *text = NULL;
    size_t n = 0;
    ck_assert_int_eq(file_read(a, "file", 50000, &text, &n, NULL), OHMEN_OK);
    ck_assert_uint_eq(n, 50000);
    arena_free(a);
    return true;
}

START_TEST(short_memory_leaves_no_descriptor)
{
    char *content = calloc(1, 50000);
    put("file", content, 50000);
    free(content);
    int before = count_descriptors();
    for (size_t k = 0;; k++) {
        struct failmem f;
        failmem_init(&f, k);
        bool done = read_with(&f.mem);
        failmem_check(&f);
        ck_assert_int_eq(count_descriptors(), before);
        ck_assert_int_eq(done, f.failed == 0);
        if (done)
            break;
    }
}
END_TEST

START_TEST(writing_makes_and_replaces)
{
    ck_assert_int_eq(file_write("file", "first, the longer one", 21, NULL), OHMEN_OK);
    expect_content("first, the longer one");
    ck_assert_int_eq(file_write("file", "second", 6, NULL), OHMEN_OK);
    expect_content("second");
    ck_assert_int_eq(file_write("file", "", 0, NULL), OHMEN_OK);
    expect_content("");
    ck_assert_int_eq(count_entries(), 1);
}
END_TEST

START_TEST(what_cannot_be_written)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(file_write("none/file", "x", 1, &e), OHMEN_IO);
    ck_assert_str_eq(e.text, "cannot write none/file: No such file or directory");
    ck_assert_int_eq(mkdir("sub", 0700), 0);
    e = (ohmen_error)OHMEN_ERROR_INIT;
    ck_assert_int_eq(file_write("sub", "x", 1, &e), OHMEN_IO);
    ck_assert_str_eq(e.text, "cannot write sub: Is a directory");
    ck_assert_int_eq(count_entries(), 1);
    char name[5000];
    memset(name, 'n', sizeof name);
    name[sizeof name - 1] = 0;
    e = (ohmen_error)OHMEN_ERROR_INIT;
    ck_assert_int_eq(file_write(name, "x", 1, &e), OHMEN_IO);
    ck_assert_ptr_nonnull(strstr(e.text, "cannot write nnn"));
}
END_TEST

/* The limit on the size of files stands in for a full disk. */
START_TEST(a_failed_write_keeps_the_old_content)
{
    ck_assert_int_eq(file_write("file", "old", 3, NULL), OHMEN_OK);
    char *content = calloc(1, 100000);
    struct rlimit before, small = {65536, 0};
    getrlimit(RLIMIT_FSIZE, &before);
    small.rlim_max = before.rlim_max;
    void (*old_handler)(int) = signal(SIGXFSZ, SIG_IGN);
    setrlimit(RLIMIT_FSIZE, &small);
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status past = file_write("file", content, 65537, &e);
    int entries = count_entries();
    setrlimit(RLIMIT_FSIZE, &before);
    signal(SIGXFSZ, old_handler);
    free(content);
    ck_assert_int_eq(past, OHMEN_IO);
    ck_assert_str_eq(e.text, "cannot write file: File too large");
    ck_assert_int_eq(entries, 1);
    expect_content("old");
}
END_TEST

START_TEST(rubbish_of_a_killed_process_is_stepped_over)
{
    char part[64];
    snprintf(part, sizeof part, "file.part-%ld-0", (long)getpid());
    put(part, "half", 4);
    ck_assert_int_eq(file_write("file", "whole", 5, NULL), OHMEN_OK);
    expect_content("whole");
    ck_assert_int_eq(count_entries(), 2);
    ck_assert_int_eq(unlink(part), 0);
}
END_TEST

Suite *suite_file(void)
{
    Suite *s = suite_create("file");
    TCase *t = tcase_create("file");
    tcase_add_checked_fixture(t, enter_folder, leave_folder);
    tcase_add_loop_test(t, limits_at_and_one_past, 0, 6);
    tcase_add_test(t, what_cannot_be_read);
    tcase_add_test(t, minus_is_the_standard_input);
    tcase_add_test(t, short_memory_leaves_no_descriptor);
    tcase_add_test(t, writing_makes_and_replaces);
    tcase_add_test(t, what_cannot_be_written);
    tcase_add_test(t, a_failed_write_keeps_the_old_content);
    tcase_add_test(t, rubbish_of_a_killed_process_is_stepped_over);
    suite_add_tcase(s, t);
    return s;
}
