/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The table of shapes, from which documentation and schema are generated. */
#include "quantity/quantity.h"

const struct quantity_shape quantity_shapes[] = {
    {SHAPE_LOGNORMAL, "lognormal", {"median", "error-factor"}, "at-most", true,
     "A positive quantity known to a factor. The median is exceeded with a chance of one half; "
     "the error factor, above 1, is the 95 % point divided by the median. With at-most, values "
     "above it are impossible and the chances of all others are scaled up to make 1 (a "
     "truncated distribution); the median and error factor are those before that cut."},
    {SHAPE_NORMAL, "normal", {"mean", "standard-deviation"}, NULL, true,
     "A quantity that is known to plus or minus an amount and may take either sign. The "
     "standard deviation is above 0 and in the unit of the mean."},
    {SHAPE_GAMMA, "gamma", {"mean", "shape-parameter"}, NULL, true,
     "A positive quantity, most often a rate known from counted events. The shape parameter, a "
     "pure number, is about the number of events that the knowledge is worth; the standard "
     "deviation is the mean divided by the root of the shape parameter."},
    {SHAPE_BETA, "beta", {"a", "b"}, NULL, true,
     "A probability, most often known from counted failures and successes. a and b are pure "
     "numbers above 0, about the failures and successes that the knowledge is worth; the mean "
     "is a / (a + b)."},
    {SHAPE_UNIFORM, "uniform", {"from", "to"}, NULL, false,
     "Every value between two bounds is equally likely."},
    {SHAPE_TRIANGULAR, "triangular", {"from", "most-likely", "to"}, NULL, false,
     "A least, a most likely and a greatest value, with likelihoods that rise and fall along "
     "straight lines."},
    {SHAPE_PERT, "pert", {"from", "most-likely", "to"}, NULL, false,
     "A least, a most likely and a greatest value with the most likely one weighing four times "
     "as much as a bound: the mean is (from + 4 most-likely + to) / 6, the form a beta "
     "distribution."},
    {SHAPE_DISCRETE, "discrete", {"values"}, NULL, true,
     "Some values, each with its probability: {low: {is: 2 h, p: 30 %}, high: {is: 9 h, p: rest}}"
     "."},
};

const size_t quantity_n_shapes = sizeof quantity_shapes / sizeof quantity_shapes[0];
