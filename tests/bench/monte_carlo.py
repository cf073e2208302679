"""tests/bench/monte_carlo.py - the run of monte_carlo.c by numpy, vectorised, in chunks.
SPDX-License-Identifier: GPL-3.0-or-later

    monte_carlo.py TRIALS [REPEATS]

Tries several chunk sizes and prints the seconds of each, the best of REPEATS, then "trials SECONDS" for the best chunk
and the results. The generator is the quickest of numpy's that suits (SFC64), its normal deviates come from numpy's
ziggurat, and the intervals from a partition, not a sort.
"""
import resource
import sys
import time

import numpy as np

PLACES, CYCLES, READINGS = 6, 3, 3
X = np.array([0.0, 0.037, 0.186, 0.382, 0.651, 0.930])
UP = np.array([0.12, 0.31, 0.86, 1.33, 1.95, 2.52])
DOWN = np.array([0.12, 0.32, 0.88, 1.36, 1.97, 2.54])
S = 0.03
LINE = X[1:]
COVERAGE = 0.95449973610364158

NORMAL, RECTANGULAR, TRIANGULAR = range(3)
COMMON = [(NORMAL, 0.10, 1.0), (NORMAL, 0.015, 4.3), (RECTANGULAR, 0.012, 4.3), (NORMAL, 0.0015, 6.25),
          (RECTANGULAR, 0.001, 6.25), (RECTANGULAR, 0.0005, 6.25), (RECTANGULAR, 0.05, 1.0), (TRIANGULAR, 0.04, 1.0),
          (NORMAL, 0.2, 0.109)]
SINGLE = [(RECTANGULAR, 0.05, 1.0), (RECTANGULAR, 0.04, 1.0), (RECTANGULAR, 0.05, 4.3)]


def effects():
    """Shapes, widths and sensitivities (one row an effect), ordered by shape."""
    rows = []
    for k, (shape, width, gain) in enumerate(COMMON):
        rows.append((shape, width, gain * (np.ones(PLACES) if 3 <= k <= 7 else X)))
    for oil in range(1, PLACES):
        for shape, width, gain in SINGLE:
            rows.append((shape, width, gain * X * (np.arange(PLACES) == oil)))
    rows.sort(key=lambda row: row[0])
    counts = [sum(row[0] == shape for row in rows) for shape in range(3)]
    return counts, np.array([row[1] * row[2] for row in rows])


COUNTS, GAINS = effects()
MEAN = np.full(CYCLES * READINGS, S / (CYCLES * READINGS))
XC = LINE - LINE.mean()
SLOPE_WEIGHTS = XC / (XC @ XC)
CHORD = (LINE - LINE[0]) / (LINE[-1] - LINE[0])


def triples():
    rows = []
    n = len(LINE)
    for i in range(n):
        for j in range(i + 1, n):
            for k in range(j + 1, n):
                row = np.zeros(n)
                span = LINE[k] - LINE[i]
                row[i], row[j], row[k] = 0.5 * (LINE[k] - LINE[j]) / span, -0.5, 0.5 * (LINE[j] - LINE[i]) / span
                rows.append(row)
    return np.array(rows).T


def pairs():
    rows = []
    n = len(LINE)
    for i in range(1, n):
        for j in range(i + 1, n):
            row = np.zeros(n)
            total = LINE[i] + LINE[j] - 2 * LINE[0]
            row[i], row[j] = (LINE[j] - LINE[0]) / total, -(LINE[i] - LINE[0]) / total
            row[0] = -row.sum()
            rows.append(row)
    return np.array(rows).T


TRIPLES, PAIRS = triples(), pairs()


def chunk_of_trials(rng, n, room, out):
    """Fills out[13, n]; room takes the readings, so that none is asked of the system anew."""
    readings = room[:n * PLACES * 2]
    rng.standard_normal(out=readings)
    means = (readings @ MEAN).reshape(n, PLACES, 2)
    up, down = UP + means[:, :, 0], DOWN + means[:, :, 1]
    drawn = np.empty((n, len(GAINS)))
    a, b = COUNTS[0], COUNTS[0] + COUNTS[1]
    drawn[:, :a] = rng.standard_normal((n, a))
    drawn[:, a:b] = rng.random((n, b - a)) * 2.0 - 1.0
    drawn[:, b:] = rng.random((n, COUNTS[2])) + rng.random((n, COUNTS[2])) - 1.0
    error = 0.5 * (up + down) + drawn @ GAINS
    line = error[:, 1:]
    slope = line @ SLOPE_WEIGHTS
    intercept = line.mean(axis=1) - slope * LINE.mean()
    out[:PLACES] = error.T
    out[6], out[7] = intercept, slope
    out[8] = np.abs(line - intercept[:, None] - slope[:, None] * LINE).max(axis=1)
    out[9] = np.abs(line @ TRIPLES).max(axis=1)
    out[10] = np.abs(line - line[:, :1] - (line[:, -1:] - line[:, :1]) * CHORD).max(axis=1)
    out[11] = np.abs(line @ PAIRS).max(axis=1)
    out[12] = np.abs(down - up).max(axis=1)


def run(trials, chunk, seed):
    rng = np.random.Generator(np.random.SFC64(seed))
    out = np.empty((PLACES + 7, trials))
    room = np.empty((chunk * PLACES * 2, CYCLES * READINGS))
    for begin in range(0, trials, chunk):
        n = min(chunk, trials - begin)
        chunk_of_trials(rng, n, room, out[:, begin:begin + n])
    tail = (1.0 - COVERAGE) / 2.0
    low, high = int(tail * trials), int((1.0 - tail) * trials)
    found = []
    for row in out:
        mean, u = row.mean(), row.std(ddof=1)
        row.partition((low, high))
        found.append((mean, u, row[low], row[high]))
    return found


def main():
    trials = int(sys.argv[1]) if len(sys.argv) > 1 else 1000000
    repeats = int(sys.argv[2]) if len(sys.argv) > 2 else 3
    best = float("inf")
    for chunk in (250, 500, 1000, 2000, 4000, 10000, 100000):
        seconds = float("inf")
        for repeat in range(repeats):
            begin = time.perf_counter()
            found = run(trials, chunk, repeat)
            seconds = min(seconds, time.perf_counter() - begin)
        print(f"chunk {chunk} {seconds:.3f}", flush=True)
        best = min(best, seconds)
    print(f"trials {best:.6f}")
    print(f"memory_kb {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss}")
    for j, (mean, u, low, high) in enumerate(found):
        print(f"output {j} {mean:.9f} {u:.9f} {low:.9f} {high:.9f}")


main()
