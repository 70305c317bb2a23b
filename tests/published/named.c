/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures by name of registers in a folder. Owns an arena for the time of one call. The units
 * are those of this file, not of the product: 1 a is 8760 h, figures come in a, kW and one of the
 * currency. */
#include "named.h"

#include <check.h>
#include <stdlib.h>
#include <string.h>

#include "base/file.h"
#include "doc/yaml.h"

static const struct sized {
    const char *name;
    double size; /* in the units that figures come in */
} units[] = {{"1", 1},
             {"%", 0.01},
             {"per-a", 1},
             {"a", 1},
             {"h", 1.0 / 8760},
             {"min", 1.0 / 525600},
             {"s", 1.0 / 31536000},
             {"MWh", 1000.0 / 8760},
             {"GBP", 1},
             {"EUR", 1},
             {"USD", 1}};

/* "h", or of so many: "h/1000". */
static double unit_size(char *name)
{
    char *stroke = strchr(name, '/'), *end = NULL;
    double over = stroke ? strtod(stroke + 1, &end) : 1;
    size_t i = 0;
    ck_assert_msg(!end || (end != stroke + 1 && *end == 0), "not a number: %s", name);
    if (stroke)
        *stroke = 0;
    while (strcmp(units[i].name, name) != 0)
        ck_assert_msg(++i < sizeof units / sizeof *units, "no unit: %s", name);
    return units[i].size * over;
}

static const char *text_of(struct arena *a, const char *folder, const char *name)
{
    char *text;
    size_t n;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *path = arena_printf(a, "%s/%s.yaml", folder, name);
    ohmen_status status = file_read(a, path, YAML_BYTES, &text, &n, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    return arena_strn(a, text, n);
}

void named_load(struct loaded *l, struct arena *a, const char *folder, size_t n,
                const char *const *files, const char *perspective)
{
    const char **texts = NEW_ARRAY(a, n, const char *);
    for (size_t i = 0; i < n; i++)
        texts[i] = text_of(a, folder, files[i]);
    loaded_texts(l, a, n, texts, perspective);
}

/* FILE[+FILE...][@PERSPECTIVE] */
static void load_written(struct loaded *l, struct arena *a, const char *folder, char *written)
{
    ARRAY(const char *) files = {0};
    char *perspective = strchr(written, '@');
    if (perspective)
        *perspective++ = 0;
    for (char *name = strtok(written, "+"); name; name = strtok(NULL, "+"))
        *array_push(a, &files) = name;
    named_load(l, a, folder, files.n, files.at, perspective);
}

double named_figure(const char *folder, char *inputs)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    char *files = strtok(inputs, " "), *name = strtok(NULL, " "), *unit = strtok(NULL, " ");
    ck_assert_msg(files && name && unit && !strtok(NULL, " "), "files, a figure and its unit");
    load_written(&l, a, folder, files);
    double value = loaded_value(&l, name) / unit_size(unit);
    arena_free(a);
    return value;
}
