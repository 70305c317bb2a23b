/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Comma-separated values: read, refused, limits, written and read again. */
#include <string.h>

#include "doc/csv.h"
#include "doc_test.h"
#include "failmem.h"
#include "random.h"
#include "tree.h"

static struct csv *read_text(struct trial *t, const char *text)
{
    return csv_read(t->a, "f", text, strlen(text), &t->d);
}

/* Header and rows as "a|b\n1|2\n". */
static const char *shown(struct trial *t, const struct csv *csv)
{
    struct text s;
    text_init(&s, t->a);
    for (size_t i = 0; i < csv->columns * (csv->rows + 1); i++) {
        const struct csv_cell *c =
            i < csv->columns ? &csv->header[i] : &csv->cells[i - csv->columns];
        text_printf(&s, "%s%s", c->text, (i + 1) % csv->columns ? "|" : "\n");
    }
    return text_str(&s);
}

struct reading {
    const char *text, *shown;
};

static const struct reading readings[] = {
    /* RFC 4180 section 2, the examples of items 1, 2, 5, 6 and 7 */
    {"aaa,bbb,ccc\r\nzzz,yyy,xxx\r\n", "aaa|bbb|ccc\nzzz|yyy|xxx\n"},
    {"aaa,bbb,ccc\r\nzzz,yyy,xxx", "aaa|bbb|ccc\nzzz|yyy|xxx\n"},
    {"\"aaa\",\"bbb\",\"ccc\"\r\nzzz,yyy,xxx", "aaa|bbb|ccc\nzzz|yyy|xxx\n"},
    {"\"aaa\",\"b\r\nbb\",\"ccc\"\r\nzzz,yyy,xxx", "aaa|b\nbb|ccc\nzzz|yyy|xxx\n"},
    {"\"aaa\",\"b\"\"bb\",\"ccc\"", "aaa|b\"bb|ccc\n"},
    /* our own */
    {"\xEF\xBB\xBF" "a,b\n1,2\n", "a|b\n1|2\n"},
    {"\n \na,b\n\n1,2\r\n\t\n3,4\n\n", "a|b\n1|2\n3|4\n"},
    {"a , b\n  x y\t,\" z \" \n", "a|b\nx y| z \n"},
    {"a,b\n,\n\"\",\"\"\n", "a|b\n|\n|\n"},
    {"a\n\"\"\n\"\n\"\n", "a\n\n\n\n"},
    {"a,b\n1,", "a|b\n1|\n"},
    {"a\ne\xCC\x81\n", "a\n\xC3\xA9\n"},
    {"a,b\n\"x,y\",\"\"\"\"\n", "a|b\nx,y|\"\n"},
};

START_TEST(is_read)
{
    struct trial t;
    trial_open(&t);
    const struct csv *csv = read_text(&t, readings[_i].text);
    ck_assert_str_eq(trial_lines(&t), "");
    ck_assert_str_eq(shown(&t, csv), readings[_i].shown);
    trial_close(&t);
}
END_TEST

struct refusal {
    const char *text, *lines;
};

static const struct refusal refusals[] = {
    {"", "f:1:1: the file is empty: a header line with the names of the columns was expected"},
    {"\n\n", "f:3:1: the file is empty: a header line with the names of the columns was expected"},
    {"a,b\n1\n1,2\n1,2,3\n", "f:2:1: this row has 1 cells, but the header has 2\n"
                             "f:4:1: this row has 3 cells, but the header has 2"},
    {"a,,b\n", "f:1:3: the header of column 2 is empty"},
    {"a,b,a\n", "f:1:5: the header 'a' stands twice"},
    {"a,b\n1,\"x\n2,3\n", "f:2:3: the quote opened here is never closed: expected another \""},
    {"a,b\n\"x\"y,2\n", "f:2:4: text follows the closing quote: a comma was expected (a quote "
                        "inside a quoted cell is written twice)"},
    {"a,b\n\xC3\xA9\"x,2\n", "f:2:2: a quote stands inside an unquoted cell: put the whole cell in "
                             "quotes and write this one twice"},
    {"a,b\n1,\x01\n", "f:2:3: an invisible control character stands here: delete it"},
    {"a,b\n1,\xC2\x9F\n", "f:2:3: an invisible control character stands here: delete it"},
    {"a,b\n1,\xFF\n",
     "f:2:3: this byte (0xff) is not UTF-8: save the file with the encoding UTF-8"},
    {"a,b\r1,2\r", "f:1:4: a carriage return without a line feed stands here: save the file with "
                   "the line ends of Windows or Unix\n"
                   "f:2:4: a carriage return without a line feed stands here: save the file with "
                   "the line ends of Windows or Unix"},
    {"a;b\n1;2\n",
     "f:1:1: the columns seem to be parted by semicolons or tabs: part them by commas"},
};

START_TEST(is_refused)
{
    struct trial t;
    trial_open(&t);
    ck_assert_ptr_null(read_text(&t, refusals[_i].text));
    ck_assert_msg(text_equal(trial_lines(&t), refusals[_i].lines), "%s\ngave:\n%s\nnot:\n%s",
                  refusals[_i].text, trial_lines(&t), refusals[_i].lines);
    trial_close(&t);
}
END_TEST

static void check_place(const struct csv_cell *c, uint32_t line, uint32_t column)
{
    ck_assert_str_eq(c->place.file, "f");
    ck_assert_uint_eq(c->place.line, line);
    ck_assert_uint_eq(c->place.column, column);
}

START_TEST(places)
{
    struct trial t;
    trial_open(&t);
    const struct csv *csv = read_text(&t, "\na, b,c\r\n\xC3\xA9,\"x\r\ny\",  z\n\n1,,2\n");
    check_place(&csv->header[1], 2, 4);
    check_place(&csv->cells[0], 3, 1);
    check_place(&csv->cells[1], 3, 3);
    check_place(&csv->cells[2], 4, 6);
    check_place(&csv->cells[4], 6, 3);
    check_place(&csv->cells[5], 6, 4);
    trial_close(&t);
}
END_TEST

/* Reads a header of `columns` columns, then `rows` rows of empty cells. */
static const char *with_cells(struct trial *t, size_t columns, size_t rows)
{
    struct text s, row;
    text_init(&s, t->a);
    text_init(&row, t->a);
    for (size_t i = 0; i < columns; i++)
        text_printf(&s, "%sc%zu", i ? "," : "", i);
    text_repeat(&row, ",", columns - 1);
    for (size_t i = 0; i < rows; i++)
        text_printf(&s, "\n%s", text_str(&row));
    const struct csv *csv = csv_read(t->a, "f", text_str(&s), s.n, &t->d);
    const char *lines = trial_lines(t);
    ck_assert_int_eq(csv != NULL, *lines == 0);
    if (csv)
        ck_assert_uint_eq(csv->rows, rows);
    return lines;
}

START_TEST(columns_and_cells)
{
    struct trial t;
    trial_open(&t);
    ck_assert_str_eq(with_cells(&t, CSV_COLUMNS, 2), "");
    ck_assert_str_eq(with_cells(&t, CSV_COLUMNS + 1, 2),
                     "f:1:1: the header has 201 columns, more than the 200 that are read");
    trial_close(&t);
    trial_open(&t);
    ck_assert_str_eq(with_cells(&t, 200, CSV_CELLS / 200), "");
    trial_close(&t);
    trial_open(&t);
    ck_assert_str_eq(with_cells(&t, 200, CSV_CELLS / 200 + 1),
                     "f:20002:1: the file holds more than 4000000 cells: split it");
    trial_close(&t);
}
END_TEST

static const char *with_cell(struct trial *t, size_t bytes, const char *quote)
{
    struct text s;
    text_init(&s, t->a);
    text_printf(&s, "a,b\n1,%s", quote);
    text_repeat(&s, "x", bytes);
    text_add(&s, quote);
    csv_read(t->a, "f", text_str(&s), s.n, &t->d);
    return trial_lines(t);
}

START_TEST(cell_length)
{
    struct trial t;
    trial_open(&t);
    ck_assert_str_eq(with_cell(&t, CSV_CELL_BYTES, ""), "");
    ck_assert_str_eq(with_cell(&t, CSV_CELL_BYTES, "\""), "");
    ck_assert_str_eq(with_cell(&t, CSV_CELL_BYTES + 1, ""),
                     "f:2:3: a cell may have at most 100000 bytes, this one has 100001");
    ck_assert_str_eq(with_cell(&t, CSV_CELL_BYTES + 1, "\""),
                     "f:2:3: a cell may have at most 100000 bytes, this one has 100001");
    trial_close(&t);
}
END_TEST

START_TEST(file_size)
{
    struct trial t;
    trial_open(&t);
    char *s = arena_alloc(t.a, (size_t)CSV_BYTES + 1);
    memset(s, '\n', (size_t)CSV_BYTES + 1);
    memcpy(s, "a\n1", 3);
    const struct csv *csv = csv_read(t.a, "f", s, CSV_BYTES, &t.d);
    ck_assert_str_eq(trial_lines(&t), "");
    ck_assert_uint_eq(csv->rows, 1);
    ck_assert_ptr_null(csv_read(t.a, "f", s, (size_t)CSV_BYTES + 1, &t.d));
    ck_assert_str_eq(trial_lines(&t), "f:1:1: the file has 268435457 bytes, more than the "
                                      "268435456 that are read: split it");
    trial_close(&t);
}
END_TEST

static const char *cell(struct arena *a, const char *s, bool guard)
{
    struct text t;
    text_init(&t, a);
    csv_cell_write(&t, s, guard);
    return text_str(&t);
}

START_TEST(cells_are_written)
{
    static const char *const rows[][3] = {
        /* text, without a guard, with it */
        {"", "", ""}, {"a b", "a b", "a b"}, {"a,b", "\"a,b\"", "\"a,b\""},
        {"a\"b", "\"a\"\"b\"", "\"a\"\"b\""}, {"a\nb", "\"a\nb\"", "\"a\nb\""},
        {" a", "\" a\"", "\" a\""}, {"a\t", "\"a\t\"", "\"a\t\""},
        {"=1+1", "=1+1", "'=1+1"}, {"+a", "+a", "'+a"}, {"-a", "-a", "'-a"}, {"@a", "@a", "'@a"},
        {"\ta", "\"\ta\"", "\"'\ta\""}, {"\ra", "\"\ra\"", "\"'\ra\""},
        {"-2.5e-3", "-2.5e-3", "-2.5e-3"}, {"+7", "+7", "+7"}, {"--7", "--7", "'--7"},
        {"-", "-", "'-"}, {"=a,b", "\"=a,b\"", "\"'=a,b\""}, {"-1,5", "\"-1,5\"", "\"'-1,5\""},
        {"a=1", "a=1", "a=1"}, {"'x", "'x", "'x"}};
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        ck_assert_str_eq(cell(a, rows[i][0], false), rows[i][1]);
        ck_assert_str_eq(cell(a, rows[i][0], true), rows[i][2]);
    }
    arena_free(a);
}
END_TEST

/* Texts are read back as written; a line break is one LF then. */
START_TEST(round_trip)
{
    struct random r = random_seed(9);
    for (int i = 0; i < 2000; i++) {
        struct trial t;
        trial_open(&t);
        struct text s;
        text_init(&s, t.a);
        const char *cells[6];
        text_add(&s, "a,b\r\n");
        for (int k = 0; k < 6; k++) {
            do
                cells[k] = tree_text(t.a, &r, false);
            while (strchr(cells[k], '\r'));
            csv_cell_write(&s, cells[k], false);
            text_add(&s, k % 2 ? "\r\n" : ",");
        }
        const struct csv *csv = csv_read(t.a, "f", text_str(&s), s.n, &t.d);
        ck_assert_str_eq(trial_lines(&t), "");
        ck_assert_uint_eq(csv->rows, 3);
        for (int k = 0; k < 6; k++)
            ck_assert_str_eq(csv->cells[k].text, cells[k]);
        trial_close(&t);
    }
}
END_TEST

static bool read_with(const struct mem *mem, const char *text)
{
    jmp_buf out_of_memory;
    struct diags d;
    struct arena *a = arena_new(mem);
    if (!a)
        return false;
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &out_of_memory);
    diags_init(&d, a);
    csv_read(a, "f", text, strlen(text), &d);
    arena_free(a);
    return true;
}

/* Memory fails at each allocation in turn; nothing is kept. */
START_TEST(memory_runs_out)
{
    struct arena *a = arena_new(NULL);
    struct text s;
    text_init(&s, a);
    text_add(&s, "a,\"b\"\n");
    for (int i = 0; i < 3000; i++)
        text_printf(&s, "%d,\"x \"\"%d\"\"\"\n", i, i);
    text_add(&s, "1\n\"open");
    for (size_t k = 0;; k++) {
        struct failmem f;
        failmem_init(&f, k);
        bool done = read_with(&f.mem, text_str(&s));
        failmem_check(&f);
        ck_assert_int_eq(done, f.failed == 0);
        if (done) {
            ck_assert_uint_gt(k, 5);
            break;
        }
    }
    arena_free(a);
}
END_TEST

Suite *suite_csv(void)
{
    Suite *s = suite_create("csv");
    TCase *t = tcase_create("csv");
    tcase_set_timeout(t, 60);
    tcase_add_loop_test(t, is_read, 0, sizeof readings / sizeof readings[0]);
    tcase_add_loop_test(t, is_refused, 0, sizeof refusals / sizeof refusals[0]);
    tcase_add_test(t, places);
    tcase_add_test(t, columns_and_cells);
    tcase_add_test(t, cell_length);
    tcase_add_test(t, file_size);
    tcase_add_test(t, cells_are_written);
    tcase_add_test(t, round_trip);
    tcase_add_test(t, memory_runs_out);
    suite_add_tcase(s, t);
    return s;
}
