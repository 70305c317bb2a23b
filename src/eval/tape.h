/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Evaluating nodes for many values of their inputs at once: what a sample needs.
 *
 * A tape is a list of instructions over *lanes* (one lane: one value of every input), made once for
 * some roots and inputs. Nodes that no input moves are constants. What an instruction computes is
 * kept in a slot, a row of lanes; a slot is used again when nobody reads it any more, so that few
 * slots, which stay in the cache, serve any number of nodes. Pairs of operations that often occur
 * together are one instruction, and so are long ones (a SUM, a DIAGRAM).
 *
 * Invariant: in every lane each root has the bits that the point rules give (eval_node) for the
 * values of that lane, whatever the instruction set, the block and the number of lanes are. That
 * holds with any mixture of lanes: no lane sees another one. Nothing is checked for being finite;
 * which NaN it is that comes out is left open.
 *
 * HELD is a constant: its value in the evaluation. */
#ifndef EVAL_TAPE_H
#define EVAL_TAPE_H

#include "base/isa.h"
#include "eval/eval.h"

struct tape;

/* What moves: inputs by their numbers (all their INPUT nodes), which rise, and further nodes, which
 * rise, too, whose values are given in place of what their operation makes (not DIAGRAM, COURSE or
 * PICK). All else stands at its value in `v`, which is read now and not later. */
struct tape_inputs {
    size_t n;
    const uint32_t *inputs;
    size_t n_given;
    const node_id *given;
};

/* Roots are any nodes but DIAGRAM and COURSE, also constants, inputs, and equal ones. Lives in `a`;
 * arrays are copied, the graph is borrowed. */
struct tape *tape_new(struct arena *a, struct eval *v, enum isa isa, const struct tape_inputs *in,
                      size_t n_roots, const node_id *roots);

/* For those who look at how it was made: instructions, slots, and operations of the graph that they
 * stand for. */
struct tape_size {
    size_t instructions, slots, operations;
};
struct tape_size tape_size(const struct tape *t);

/* The number of lanes at which the slots fit into the cache; a multiple of 64. */
size_t tape_block(const struct tape *t);

/* A work space for up to `block` lanes, for one thread. What it needs later is allocated here, by
 * running the instructions that ask for room once at the values of `v`. */
struct tape_work;
struct tape_work *tape_work_new(struct arena *a, const struct tape *t, size_t block);

/* Computes n <= block lanes: in[i][0 .. n) of input i, then of the given nodes; out[k][0 .. n) of
 * root k. Rows need no alignment; out may not overlap in. Allocates nothing. Tapes may be run by
 * several threads at once, each with its work space. */
void tape_run(const struct tape *t, struct tape_work *w, size_t n, const double *const *in,
              double *const *out);

#endif
