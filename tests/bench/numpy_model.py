# SPDX-License-Identifier: GPL-3.0-or-later
"""The model of tape_model.h in NumPy, beside a tape of it, in turn.

    python3 numpy_model.py TAPE HAZARDS LANES

TAPE is the program tests/bench/tape. NumPy works through blocks of the size that suits it best,
into arrays that are used again. Prints operations and lanes a second of both, and their ratio: the
tape is to be 5 times as fast."""
import re
import statistics
import subprocess
import sys
import time

try:
    import numpy as np
except ImportError:
    print("NumPy is not installed: no comparison with it")
    sys.exit(0)

RUNS, OPERATIONS, INPUTS, CONSTANTS = 11, 40, 7, 15
BLOCKS = (1024, 2048, 4096, 8192, 16384)


def add(total, lost, x, room):
    """A term of a compensated sum."""
    t, greater, less = room[:3]
    keeps = np.abs(total) >= np.abs(x)
    np.add(total, x, out=t)
    np.copyto(greater, np.where(keeps, total, x))
    np.copyto(less, np.where(keeps, x, total))
    np.subtract(greater, t, out=greater)
    np.add(greater, less, out=greater)
    np.add(lost, greater, out=lost)
    np.copyto(total, t)


def risk(x, c, room):
    rate = x[0] * c[0]
    exposed = rate * c[1]
    p = [np.minimum(x[1 + i] * c[2 + i], 1) for i in range(4)]
    q = [1 - p[i] for i in range(3)]
    a = p[1] * c[6] + q[1] * c[7]
    b = p[2] * c[8] + q[2] * c[9]
    harm = p[0] * a + q[0] * b
    people, money = x[5] * c[10], x[6] * c[11]
    e1, e2 = exposed * p[0], exposed * q[0]
    total, lost = room[3], room[4]
    total.fill(0)
    lost.fill(0)
    for term in (e1 * p[3] * people, e1 * money * a, e2 * people * b, e2 * money * c[12],
                 exposed * harm * c[13], rate * money * c[12]):
        add(total, lost, term, room)
    return (total + lost) * c[14]


def run(x, c, block):
    """Seconds for all blocks of lanes, hazards inside."""
    lanes = x.shape[1]
    room = np.empty((5, block))
    begin = time.perf_counter()
    for at in range(0, lanes, block):
        part = x[:, at:at + block]
        for h in range(len(c)):
            risk(part, c[h], room[:, :part.shape[1]])
    return time.perf_counter() - begin


def run_tape(tape, hazards, lanes):
    """10^9 operations and lanes a second with whole programs, by the best instruction set."""
    out = subprocess.run([tape, str(hazards), str(lanes)], capture_output=True, text=True,
                         check=True).stdout
    return float(re.findall(r"programs +([0-9.]+) Gop", out)[-1])


def main():
    tape, hazards, lanes = sys.argv[1], int(sys.argv[2]), int(sys.argv[3])
    rng = np.random.default_rng(1)
    x = rng.random((INPUTS, lanes))
    c = rng.uniform(0.1, 1.5, (hazards, CONSTANTS))
    work = OPERATIONS * hazards * lanes / 1e9
    block = min(BLOCKS, key=lambda size: min(run(x, c, size) for _ in range(3)))
    ours, theirs = [], []
    for _ in range(RUNS):
        theirs.append(work / run(x, c, block))
        ours.append(run_tape(tape, hazards, lanes))
    a, b = statistics.median(ours), statistics.median(theirs)
    print(f"NumPy    block {block:5}        {b:6.2f} Gop-lane/s; the tape {a:.2f}: {a / b:.1f} times")


main()
