"""Writes order_intervals.json beside this file: ranks of distribution-free intervals of
percentiles, and their coverage, from SciPy's binomial distribution. Needs Debian's
python3-scipy.

All pairs of ranks are tried, in the order of the rule: of those that leave (1-level)/2 or
less in either tail the closest; else of those that hold an extreme and leave 1-level or
less in both tails together the closest; else none, and the extremes. Rows are n, percent,
level, ranks from 0, coverage and whether it reaches the level. Bounds are kept within
1e-12."""
import json
import os
import sys

import numpy as np
import scipy
from scipy.stats import binom

SLACK = 1e-12


def interval(n, percent, level):
    p = percent / 100
    ranks = np.arange(n)
    below = binom.cdf(ranks, n, p)  # what lies left of rank i
    above = binom.sf(ranks, n, p)  # right of it: P(B >= i+1)
    tail = (1 - level) / 2 + SLACK
    lows, highs = ranks[below <= tail], ranks[above <= tail]
    if len(lows) and len(highs):
        low, high = lows.max(), highs.min()
    elif len(highs):
        low, fit = 0, ranks[above + below[0] <= 1 - level + SLACK]
        high = fit.min() if len(fit) else n - 1
    elif len(lows):
        high, fit = n - 1, ranks[below + above[-1] <= 1 - level + SLACK]
        low = fit.max() if len(fit) else 0
    else:
        low, high = 0, n - 1
    coverage = binom.cdf(high, n, p) - binom.cdf(low, n, p)
    ok = bool(low < high and below[low] + above[high] <= 1 - level + SLACK)
    return [n, percent, level, int(low), int(high), float(max(coverage, 0)), ok]


rows = [interval(n, percent, level)
        for n in list(range(1, 13)) + [17, 20, 25, 37, 60, 100, 251, 1000, 3000, 100000, 1000000]
        for percent in [2.5, 16, 50, 84, 97.5]
        for level in [0.8, 0.9, 0.95, 0.99]]
made_by = "order_intervals.py with SciPy %s, Python %s" % (scipy.__version__, sys.version.split()[0])
with open(os.path.join(os.path.dirname(os.path.abspath(__file__)), "order_intervals.json"), "w") as f:
    f.write("{\n \"made_by\": %s,\n \"rows\": [\n" % json.dumps(made_by))
    f.write(",\n".join("  " + json.dumps(r) for r in rows) + "\n ]\n}\n")
