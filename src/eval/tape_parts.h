/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a tape is made of, inside src/eval (tape.h).
 *
 * A step names what it reads and writes by *rows*. The rows of a run are, in this order: the slots,
 * the inputs and the roots; behind them constants are numbered, which are no rows of lanes.
 * While a tape is made, values are numbered instead: inputs first, then what steps make, and
 * constants with TAPE_CONSTANT added.
 *
 * Invariant: kernels are run over whole groups of TAPE_GROUP lanes; what a call has more or less
 * than that is done in rows of the work space. A step reads a lane of all its arguments before it
 * writes that lane, so that a result may take the row of an argument. */
#ifndef EVAL_TAPE_PARTS_H
#define EVAL_TAPE_PARTS_H

#include "eval/state.h"
#include "eval/tape.h"

enum { TAPE_GROUP = 64 };
#define TAPE_CONSTANT 0x80000000u
#define TAPE_NONE UINT32_MAX

/* A step as it is run: what it writes, then what it reads, rows or numbers of constants. What is
 * run lies in the order in which it is read. */
struct tape_call;
/* n is a multiple of TAPE_GROUP; w->count of these lanes are asked for. */
typedef void tape_kernel(const struct tape_call *c, struct tape_work *w, size_t n);
struct tape_call {
    tape_kernel *run;
    const uint32_t *rows; /* of the result, then of the arguments */
    const void *more;     /* the kernel's own: its program, or the step */
};

/* Rows that are read, and written. */
struct tape_rows ARRAY_BODY(uint32_t);

/* Codes of a program (tape_kernels.h). */
struct tape_codes ARRAY_BODY(uint8_t);

struct tape_step {
    tape_kernel *run;
    node_id node;            /* the operation, the last where there are several */
    uint32_t first_constant; /* rows from here on are constants */
    struct tape_rows args, to;
    struct tape_codes codes; /* of arithmetic; none: `run` is all */
    struct tape_rows picks;  /* DIAGRAM: which results go to each of `to` */
    uint32_t operations;     /* of the graph that it stands for */
    uint32_t room;           /* which of tape_work's rooms is its own, or TAPE_NONE */
    const void *more;        /* the kernel's own */
};

struct tape {
    struct arena *arena;
    const struct graph *g;
    enum isa isa;
    size_t n_in, n_roots, n_slots, n_rooms, most_args, most_room, most_at;
    ARRAY(struct tape_step) steps;
    struct tape_call *calls;
    ARRAY(double) constants;
    struct tape_rows roots; /* the row of each; its own where a step writes into it */
};

struct tape_work {
    const struct tape *tape;
    size_t block, count;
    double **row;
    const double *constant;
    double **slot, **spare; /* rows of slots; of inputs and roots for a broken group */
    double *x;              /* scratch: arguments of one lane */
    double *room;      /* scratch of diagrams: most_room doubles, from a line of the cache on */
    const double **at; /* scratch of diagrams: most_at rows */
    struct tape_average **averages;
};

static inline double tape_read(const struct tape_step *s, const struct tape_work *w, size_t i,
                               size_t lane)
{
    uint32_t at = s->args.at[i];
    return at < s->first_constant ? w->row[at][lane] : w->constant[at - s->first_constant];
}

/* Lane by lane, by the point rule of the op table: for any operation but DIAGRAM and PICK. */
tape_kernel tape_by_point;
/* A diagram lane by lane; args: p, then q of each of its variables; TAPE_NONE: 1 - p. */
tape_kernel tape_diagram_by_point;

/* A DIAGRAM over windows (tape_average.c): adds to the step what it reads. `operand` gives the
 * value of a node. */
struct tape_average;
struct tape_maker;
void tape_average_begin(struct tape_maker *m, struct tape_step *s, node_id n);
struct tape_average *tape_average_new(struct arena *a, const struct tape_step *s, enum isa isa);
tape_kernel tape_average_run;

/* ---- making ---- */

/* How a tape is made; tape_new does all. For tests and measurements. */
enum tape_fusing { TAPE_SINGLE, TAPE_PAIRS_ONLY, TAPE_FUSED };
struct tape_how {
    enum tape_fusing fusing;
    bool by_point;    /* no kernel but the point rules */
    bool keeps_slots; /* no slot is used twice */
};

/* A node that was reached from the roots. */
struct tape_reached {
    node_id node;
    uint32_t operand; /* value or constant; TAPE_NONE: not yet known */
    uint32_t step;    /* DIAGRAM: the step that makes it */
    bool moves, is_needed;
};

struct tape_maker {
    struct arena *arena; /* scratch */
    struct tape *tape;
    struct eval *v;
    const struct tape_inputs *in;
    struct tape_how how;
    uint64_t *met; /* a bit for each node of the graph */
    ARRAY(node_id) open;
    ARRAY(struct tape_reached) reached; /* in the order of numbers */
    uint32_t n_values;
    struct tape_rows roots; /* values */
};

struct tape_reached *tape_find(const struct tape_maker *m, node_id n);
uint32_t tape_constant(struct tape_maker *m, double x);
/* The value of a node that was reached, or a constant. */
uint32_t tape_operand(struct tape_maker *m, node_id n);
bool tape_is_given(const struct tape_maker *m, node_id n);

/* The kernel of a function over lanes (tape_functions.c); NULL: not that. Arguments are values. */
tape_kernel *tape_function(const struct tape_maker *m, const struct tape_step *s);
/* The program of an operation whose arguments are read already (tape_fuse.c); some have none. */
void tape_begin_program(struct tape_maker *m, struct tape_step *s);
/* Makes one step of several where a value is used only once. */
void tape_fuse(struct tape_maker *m);
/* Puts steps in an order in which values are not kept for long (tape_order.c). */
void tape_order(struct tape_maker *m);
/* Takes long sums apart (tape_split.c); tape_order has to come after it. */
void tape_split(struct tape_maker *m);
/* Does the program have a loop of its own? */
bool tape_has_loop(const struct tape_codes *codes);

/* Gives each value its row (tape_slots.c). */
void tape_place(struct tape_maker *m);
/* Chooses the kernels of programs, whose arguments are rows (tape_lower.c). */
void tape_lower(struct tape_maker *m);

struct tape *tape_new_as(struct arena *a, struct eval *v, enum isa isa,
                         const struct tape_inputs *in, size_t n_roots, const node_id *roots,
                         struct tape_how how);

#endif
