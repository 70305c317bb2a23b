/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The way out: documents, lists of observations, and copies of the file. */
#include "doc/yaml.h"
#include "model/bind.h"
#include "work/observations.h"

/* Sections in the order of kinds, objects in byte order of ids. */
static struct node *document_of(struct job *j)
{
    struct node *root = node_map(j->arena, (struct place){0});
    for (int k = 0; k < KIND_COUNT; k++) {
        const struct objects *all = &j->model->of[k];
        struct node *section = node_map(j->arena, (struct place){0});
        for (size_t i = 0; i < all->n; i++) {
            const struct object *o = all->at[i];
            struct node *doc = bind_document(j->arena, kinds[k].table, o->node);
            if (k == KIND_REGISTER)
                section = doc;
            else
                node_add(j->arena, section, o->id, (struct place){0}, doc);
        }
        if (all->n)
            node_add(j->arena, root, kinds[k].section, (struct place){0}, section);
    }
    return root;
}

static ohmen_status export_objects(struct job *j, void *ctx, ohmen_error *e)
{
    struct text t;
    (void)ctx;
    ohmen_status status = job_load_model(j, e);
    if (status != OHMEN_OK)
        return status;
    text_init(&t, j->arena);
    yaml_write(&t, document_of(j));
    j->out->text = text_str(&t);
    return OHMEN_OK;
}

static ohmen_status export_observations(struct job *j, void *ctx, ohmen_error *e)
{
    struct store_observations all = {0};
    struct text t;
    (void)ctx;
    ohmen_status status = job_load_objects(j, e);
    if (status == OHMEN_OK)
        status = store_state_observations(j->store, j->at, &all, e);
    if (status != OHMEN_OK)
        return status;
    text_init(&t, j->arena);
    observations_write(&t, &all);
    j->out->text = text_str(&t);
    return OHMEN_OK;
}

ohmen_status ohmen_export(ohmen_register *r, const ohmen_query *q, ohmen_export_part part,
                          ohmen_report **out, const char **text, ohmen_error *e)
{
    job_run *run = part == OHMEN_EXPORT_OBSERVATIONS ? export_observations : export_objects;
    ohmen_report *made = NULL;
    ohmen_status status = job_do(r, STORE_READ, q, run, NULL, &made, e);
    if (status != OHMEN_OK)
        return status;
    *out = made;
    *text = made->text;
    return OHMEN_OK;
}

static ohmen_status run_backup(struct job *j, void *ctx, ohmen_error *e)
{
    return store_backup(j->store, ctx, e);
}

ohmen_status ohmen_backup(ohmen_register *r, const char *path, ohmen_error *e)
{
    ohmen_report *made = NULL;
    ohmen_status status = job_do(r, STORE_READ, NULL, run_backup, (void *)path, &made, e);
    ohmen_report_free(made);
    return status;
}
