"""Writes weights.json beside this file: invented samples with weights, and their
weighted figures in rational numbers. Needs nothing but Python.

A percentile is integrated as A. Akinshin, Weighted quantile estimators,
arXiv:2304.07265, 2023, defines it for the seventh type: with the shares w of the
weights, n* = 1/sum(w**2) and a = (n* - 1)*p, each value counts with the length that
its piece of [0, 1] has in common with [a/n*, (a + 1)/n*], times n*. Logarithms are
taken with 50 digits."""
import json
import os
import random
import sys
from decimal import Decimal, getcontext
from fractions import Fraction

getcontext().prec = 50
PERCENTS = [0, 2.5, 5, 16, 33.3, 50, 66.7, 84, 95, 97.5, 100]
rng = random.Random(6)


def percentile(pairs, percent):
    total = sum(w for _, w in pairs)
    number = total**2 / sum(w * w for _, w in pairs)
    low = (number - 1) * Fraction(percent) / 100 / number
    high = low + 1 / number
    at, out = Fraction(0), Fraction(0)
    for x, w in pairs:
        begin, at = at, at + w / total
        out += max(Fraction(0), min(at, high) - max(begin, low)) * number * x
    return float(out)


def decimal(f):
    return Decimal(f.numerator) / Decimal(f.denominator)


def log_moments(pairs):
    logs = [(decimal(x).ln(), decimal(w)) for x, w in pairs if w > 0]
    total = sum(w for _, w in logs)
    mean = sum(w * y for y, w in logs) / total
    if len(logs) < 2:
        return float(mean.exp()), None
    divisor = total - sum(w * w for _, w in logs) / total
    return float(mean.exp()), float((sum(w * (y - mean)**2 for y, w in logs) / divisor).sqrt())


def weight(kind):
    if kind == "events":  # a value counts as one of those of its event
        return 1 / rng.choice([1, 2, 3, 7, 12, 40])
    if kind == "uneven":
        return rng.lognormvariate(0, 2)
    return float(rng.choice([0, 0, 1, 2, 5]))


cases = []
for kind in ["events", "uneven", "whole"]:
    for n in [1, 2, 3, 4, 5, 7, 10, 16, 25, 50, 120]:
        x = sorted(round(rng.lognormvariate(-2, 0.8), 3) for _ in range(n))
        w = [weight(kind) for _ in range(n)]
        w[n // 2] = w[n // 2] or 1.0
        pairs = [(Fraction(a), Fraction(b)) for a, b in zip(x, w)]
        total = sum(b for _, b in pairs)
        log_mean, log_std = log_moments(pairs)
        cases.append({
            "x": x, "weights": w,
            "effective": float(total**2 / sum(b * b for _, b in pairs)),
            "percentiles": [percentile(pairs, p) for p in PERCENTS],
            "mean": float(sum(a * b for a, b in pairs) / total),
            "log_mean": log_mean, "log_std": log_std,
        })
made_by = "weights.py with Python %s" % sys.version.split()[0]
with open(os.path.join(os.path.dirname(os.path.abspath(__file__)), "weights.json"), "w") as f:
    f.write("{\n \"made_by\": %s,\n \"percents\": %s,\n \"cases\": [\n" % (json.dumps(made_by), json.dumps(PERCENTS)))
    f.write(",\n".join("  " + json.dumps(c) for c in cases) + "\n ]\n}\n")
