/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Verdicts by the bytes of files. Owns the list of states met, newest last. */
#include "known.h"

#include <check.h>
#include <dirent.h>
#include <sodium.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

enum { ENOUGH = 2, AT_ONCE = 1 << 16 };

static int is_file(const struct dirent *d)
{
    return d->d_name[0] != '.';
}

/* The name with its final zero, the length, the bytes: no two folders run together alike. */
static void add_file(crypto_generichash_state *sum, const char *folder, const char *name)
{
    static unsigned char part[AT_ONCE];
    char path[4096];
    struct stat st;
    snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *f = fopen(path, "rb");
    ck_assert_msg(f && fstat(fileno(f), &st) == 0, "%s cannot be read", path);
    crypto_generichash_update(sum, (const unsigned char *)name, strlen(name) + 1);
    crypto_generichash_update(sum, (const unsigned char *)&st.st_size, sizeof st.st_size);
    for (size_t n; (n = fread(part, 1, sizeof part, f)) > 0;)
        crypto_generichash_update(sum, part, n);
    ck_assert_msg(!ferror(f), "%s cannot be read", path);
    fclose(f);
}

void known_key(const char *folder, unsigned char key[KNOWN_KEY])
{
    crypto_generichash_state sum;
    struct dirent **names;
    int n = scandir(folder, &names, is_file, alphasort);
    ck_assert_int_gt(n, 0);
    crypto_generichash_init(&sum, NULL, 0, KNOWN_KEY);
    for (int i = 0; i < n; i++) {
        add_file(&sum, folder, names[i]->d_name);
        free(names[i]);
    }
    free(names);
    crypto_generichash_final(&sum, key, KNOWN_KEY);
}

static struct known_state *find(const struct known *k, const unsigned char key[KNOWN_KEY])
{
    for (size_t i = k->states.n; i > 0; i--)
        if (memcmp(k->states.at[i - 1].key, key, KNOWN_KEY) == 0)
            return &k->states.at[i - 1];
    return NULL;
}

bool known_certain(const struct known *k, const unsigned char key[KNOWN_KEY], int *verdict)
{
    const struct known_state *state = find(k, key);
    if (!state || state->times < ENOUGH)
        return false;
    *verdict = state->verdict;
    return true;
}

void known_note(struct known *k, const unsigned char key[KNOWN_KEY], int verdict)
{
    struct known_state *state = find(k, key);
    if (state) {
        ck_assert_int_eq(state->verdict, verdict);
        state->times++;
        return;
    }
    state = array_push(k->a, &k->states);
    *state = (struct known_state){.verdict = verdict, .times = 1};
    memcpy(state->key, key, KNOWN_KEY);
}
