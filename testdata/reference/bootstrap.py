"""Writes bootstrap.json beside this file: draws of clusters for some seeds, and intervals
of an invented sample under the cluster bootstrap. Needs Debian's python3-numpy.

The generator is written anew from its description: M. E. O'Neill, PCG: a family of simple
fast space-efficient statistically good algorithms for random number generation, Harvey
Mudd College, HMC-CS-2014-0905, 2014: a congruential generator of 128 bits, advanced before
its output function DXSM, as in Go's math/rand/v2. A number below n is drawn by D. Lemire's
multiplication, rejecting low products below 2**64 mod n.

The intervals are from 400,000 resamples by NumPy's own generator, each resample made in
full: clusters are concatenated, and the figures are those of NumPy."""
import json
import os
import sys

import numpy as np

MASK, WORD = 2**128 - 1, 2**64 - 1
STREAM = int.from_bytes(b"bootstra", "big")


class Generator:
    def __init__(self, high, low):
        self.state = high << 64 | low

    def next(self):
        mul = 2549297995355413924 << 64 | 4865540595714422341
        add = 6364136223846793005 << 64 | 1442695040888963407
        self.state = (self.state * mul + add) & MASK
        high, low = self.state >> 64, self.state & WORD
        high ^= high >> 32
        high = high * 0xDA942042E4DD58B5 & WORD
        high ^= high >> 48
        return high * (low | 1) & WORD

    def below(self, n):
        while True:
            product = self.next() * n
            if product & WORD >= 2**64 % n:
                return product >> 64


draws = []
for seed, clusters in [(0, 1), (1, 2), (2, 7), (20260401, 60), (2**64 - 1, 13)]:
    g = Generator(seed, STREAM)
    for resample in range(3):
        counts = [0] * clusters
        for _ in range(clusters):
            counts[g.below(clusters)] += 1
        draws.append({"seed": str(seed), "resample": resample, "counts": counts})

rng = np.random.default_rng(9)
sizes = [1, 2, 3, 5, 8, 13, 1, 4, 6, 9, 2, 30]
values = [np.round(np.exp(-2 + 0.5 * rng.standard_normal() + 0.6 * rng.standard_normal(n)), 4) for n in sizes]
RESAMPLES, PERCENTS = 400000, [2.5, 5, 50, 95, 97.5]
figures = np.empty((RESAMPLES, 4))
for r in range(RESAMPLES):
    x = np.concatenate([values[k] for k in rng.integers(0, len(sizes), len(sizes))])
    y = np.log(x)
    figures[r] = x.mean(), np.exp(y.mean()), y.std(ddof=1), np.percentile(x, 84)
made_by = "bootstrap.py with NumPy %s, Python %s" % (np.__version__, sys.version.split()[0])
with open(os.path.join(os.path.dirname(os.path.abspath(__file__)), "bootstrap.json"), "w") as f:
    f.write("{\n \"made_by\": %s,\n \"draws\": [\n" % json.dumps(made_by))
    f.write(",\n".join("  " + json.dumps(d) for d in draws))
    f.write("\n ],\n \"clusters\": [\n")
    f.write(",\n".join("  " + json.dumps(v.tolist()) for v in values))
    f.write("\n ],\n \"percents\": %s,\n \"figures\": {\n" % json.dumps(PERCENTS))
    names = ["mean", "log_mean", "log_std", "percentile_84"]
    f.write(",\n".join("  \"%s\": %s" % (name, json.dumps(np.percentile(column, PERCENTS).tolist()))
                       for name, column in zip(names, figures.T)))
    f.write("\n }\n}\n")
