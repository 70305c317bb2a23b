/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any bytes as comma-separated values. What is read is written and read back as
 * it was; what is refused has diagnostics with places. */
#include "base/text.h"
#include "doc/csv.h"
#include "fuzz.h"

const char *const fuzz_words[] = {
    ",", "\"", "\"\"", "\n", "\r\n", "\r", "\n\n", "\",\"", " ", "\t", ";", "=1+1", "-7", "@x",
    "\"\n\"", ",,,,", "date,kind,object\n", "\xC3\xA9", "e\xCC\x81", "\xEF\xBB\xBF",
    "\xE2\x80\xA8", "\xFF", "\x01", "\x7F", NULL};

/* An empty cell that is a whole line would be a blank line: it gets quotes. */
static void write_line(struct text *t, const struct csv *csv, const struct csv_cell *cells)
{
    for (size_t i = 0; i < csv->columns; i++) {
        if (i > 0)
            text_byte(t, ',');
        if (csv->columns == 1 && !*cells[i].text)
            text_add(t, "\"\"");
        else
            csv_cell_write(t, cells[i].text, false);
    }
    text_add(t, "\r\n");
}

static void check_again(struct arena *a, const struct csv *csv)
{
    struct diags d;
    struct text t;
    diags_init(&d, a);
    text_init(&t, a);
    write_line(&t, csv, csv->header);
    for (size_t i = 0; i < csv->rows; i++)
        write_line(&t, csv, csv->cells + i * csv->columns);
    const struct csv *again = csv_read(a, "again", text_str(&t), t.n, &d);
    REQUIRE(again != NULL && d.count == 0);
    REQUIRE(again->columns == csv->columns && again->rows == csv->rows);
    for (size_t i = 0; i < csv->columns; i++)
        REQUIRE(text_equal(again->header[i].text, csv->header[i].text));
    for (size_t i = 0; i < csv->columns * csv->rows; i++)
        REQUIRE(text_equal(again->cells[i].text, csv->cells[i].text));
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    struct arena *a = fuzz_arena();
    struct diags d;
    diags_init(&d, a);
    const struct csv *csv = csv_read(a, "input", (const char *)data, size, &d);
    REQUIRE((csv == NULL) == (d.count > 0));
    fuzz_check_diags(&d, (const char *)data, size);
    if (csv)
        check_again(a, csv);
    arena_free(a);
    return 0;
}
