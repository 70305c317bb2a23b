/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How what is unknown is sampled: from the query to a plan, and back to words.
 *
 * Samples come in 16 sets, as large as what is asked for allows, since in larger sets points lie
 * more evenly; where there is a precision to be reached they stay small: one can stop soon. */
#include <string.h>

#include "base/parallel.h"
#include "work/work.h"

enum {
    USUAL_SAMPLES = 512,
    LEAST_SAMPLES = 256,
    MOST_SAMPLES = 1 << 20,
    MOST_FOR_PRECISION = 65536,
    LOG2_FOR_PRECISION = 6
};

/* What is sampled from now on is as small as can be: whoever interrupts does not want to wait. */
static void interrupt(struct job *j)
{
    j->interrupted = true;
    j->sampled.batches = j->plan.most_batches;
    j->sampled.points = (size_t)1 << j->plan.log2_points;
    j->plan.most_batches = 1;
    j->plan.log2_points = DRAW_LEAST_LOG2;
}

/* Between batches: tells whoever watches, and asks whether to go on. */
static bool watch(void *ctx, size_t batches, size_t most)
{
    struct job *j = ctx;
    size_t all = j->sampled.all ? j->sampled.all : 1;
    job_progress(j, "sampling", j->sampled.done * most + batches, all * most);
    if (batches == 0 || !j->reg->stop || !j->reg->stop(j->reg->stop_ctx))
        return true;
    if (batches < most && !j->interrupted)
        interrupt(j);
    return false;
}

bool job_goes_on(struct job *j, const char *phase, size_t done, size_t total)
{
    job_progress(j, phase, done, total);
    if (done == total || !j->reg->stop || !j->reg->stop(j->reg->stop_ctx))
        return true;
    if (!j->interrupted)
        interrupt(j);
    return false;
}

static unsigned log2_above(size_t n)
{
    unsigned k = 0;
    while (((size_t)1 << k) < n)
        k++;
    return k;
}

/* "0.5 %" or "0.005". */
static bool read_part(const char *s, double *out)
{
    size_t n = strspn(s, "0123456789.");
    double x;
    if (!text_to_double(s, s + n, &x))
        return false;
    n += strspn(s + n, " ");
    bool is_percent = s[n] == '%';
    *out = is_percent ? x / 100 : x;
    return s[n + is_percent] == 0 && *out > 0 && *out < 1;
}

static ohmen_status find_kernels(struct job *j, ohmen_error *e)
{
    const char *name = j->query.kernels;
    if (!name)
        return OHMEN_OK;
    if (!isa_of_name(name, &j->plan.isa))
        return error_set(e, OHMEN_USAGE, "there are no kernels \"%s\": plain, wide or widest",
                         name);
    if (!isa_runs(j->plan.isa))
        return error_set(e, OHMEN_USAGE,
                         "this processor does not have what the kernels \"%s\" need", name);
    return OHMEN_OK;
}

static void find_sizes(struct job *j)
{
    size_t wanted = j->query.samples ? j->query.samples : USUAL_SAMPLES;
    if (j->plan.precision > 0 && !j->query.samples)
        wanted = MOST_FOR_PRECISION;
    wanted = wanted < LEAST_SAMPLES ? LEAST_SAMPLES : wanted > MOST_SAMPLES ? MOST_SAMPLES : wanted;
    unsigned log2 = log2_above(wanted), most = DRAW_MOST_LOG2, batch = log2_above(SAMPLING_BATCH);
    if (j->plan.precision > 0)
        most = LOG2_FOR_PRECISION;
    j->plan.log2_points = log2 - batch < most ? log2 - batch : most;
    j->plan.most_batches = (size_t)1 << (log2 - batch - j->plan.log2_points);
}

ohmen_status job_find_plan(struct job *j, ohmen_error *e)
{
    const ohmen_query *q = &j->query;
    j->plan = sampling_defaults();
    if (q->precision && !read_part(q->precision, &j->plan.precision))
        return error_set(e, OHMEN_USAGE, "\"%s\" is no part between 0 and 1 such as '0.5 %%'",
                         q->precision);
    find_sizes(j);
    j->plan.seed = q->seed ? q->seed : 1;
    j->plan.threads = q->threads ? q->threads : parallel_processors();
    if (j->plan.threads > PARALLEL_MOST)
        return error_set(e, OHMEN_USAGE, "there are %d threads at the most", PARALLEL_MOST);
    j->plan.block = q->block;
    j->plan.watch = watch;
    j->plan.watch_ctx = j;
    return find_kernels(j, e);
}

const char *sampling_words(struct job *j, const struct sampling *s)
{
    const char *end = "";
    if (s->interrupted)
        end = arena_printf(j->arena, "; interrupted after %zu of %zu batches", s->batches,
                           j->sampled.batches);
    else if (j->interrupted && s->points < j->sampled.points)
        end = "; as few as can be, since the sampling was interrupted before";
    else if (j->plan.precision > 0)
        end = s->reached ? "; the precision that was asked for is reached"
                         : "; the precision that was asked for is not reached";
    return arena_printf(
        j->arena, "%zu samples in %zu independent sets of %zu scrambled points, seed %llu%s",
        s->sets * s->points, s->sets, s->points, (unsigned long long)j->plan.seed, end);
}
