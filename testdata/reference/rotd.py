"""Writes rotd.json: RotD50 and RotD100 of invented pairs of motions, by SciPy.

    /usr/bin/python3 rotd.py > rotd.json

By brute force: the displacement and velocity of both components by the matrix
exponential over pieces of a step no longer than 0.01/omega (history in
spectra.py, whose head defines the motions too), turned by 0, 1, ... 179 degrees
from the first component, and of each direction the greatest |u| of the cubic
Hermite interpolants: within about 0.01**4/384 = 3e-11 of the continuous maximum.
RotD50 is the median of the 180, RotD100 their maximum.

Two directions of each pair are checked with solve_ivp (DOP853, rtol 1e-12) of the
acceleration in that direction, which shares neither the turning nor the
exponential.
"""

import json
import platform
import sys

import numpy as np
import scipy

from spectra import by_ivp, hermite_peak, history, samples

PAIRS = [
    {"name": "Invented D", "step_s": 0.005, "n": 700, "seeds": [1971, 1812], "tail": 0},
    {"name": "Invented E", "step_s": 0.02, "n": 400, "seeds": [90210, 7], "tail": 150},
]
OSCILLATORS = [
    (0.01, 0.05), (0.021, 0.0), (0.05, 0.02), (0.1, 0.05), (0.2, 0.1), (0.35, 0.05),
    (0.5, 0.0), (0.75, 0.2), (1.0, 0.05), (2.0, 0.05), (4.0, 0.02), (10.0, 0.0),
]
CHECKED = [((0.1, 0.05), 30), ((1.0, 0.05), 137)]


def peak(u, v, h):
    """hermite_peak where it can matter: at points that reach 0.98 of the greatest.
    Between points u exceeds them by no more than h*h/8 of its second derivative."""
    near = np.nonzero(np.abs(u) >= 0.98 * np.abs(u).max())[0]
    runs = np.split(near, np.nonzero(np.diff(near) > 1)[0] + 1)
    return max(hermite_peak(u[max(r[0] - 1, 0) : r[-1] + 2], v[max(r[0] - 1, 0) : r[-1] + 2], h) for r in runs)


def turned(x, y, degrees):
    angle = np.radians(degrees)
    return x * np.cos(angle) + y * np.sin(angle)


def directions(first, second, step, period, damping):
    u1, v1, h = history(first, step, period, damping, phase=0.01)
    u2, v2, _ = history(second, step, period, damping, phase=0.01)
    return [peak(turned(u1, u2, k), turned(v1, v2, k), h) for k in range(180)]


def main():
    pairs = []
    for p in PAIRS:
        whole = [samples(p["n"], seed, p["tail"]) for seed in p["seeds"]]
        first, second = (np.array(w) / 1024 for w in whole)
        rows = []
        for period, damping in OSCILLATORS:
            d = directions(first, second, p["step_s"], period, damping)
            rows.append({"period_s": period, "damping": damping, "rotd50_m": float(np.median(d)), "rotd100_m": max(d)})
            for oscillator, degrees in CHECKED:
                if oscillator == (period, damping):
                    other = by_ivp(turned(first, second, degrees), p["step_s"], period, damping)
                    print(p["name"], period, damping, degrees, "ivp/expm - 1 = %.1e" % (other / d[degrees] - 1), file=sys.stderr)
                    assert abs(other / d[degrees] - 1) < 1e-9
        components = [
            {"seed": s, "sum_of_1024ths": sum(w), "sum_of_squares": sum(k * k for k in w)} for s, w in zip(p["seeds"], whole)
        ]
        pairs.append({"name": p["name"], "step_s": p["step_s"], "n": p["n"], "tail": p["tail"], "components": components, "rotd": rows})
    json.dump(
        {
            "provenance": "written by rotd.py beside this file; invented motions, see spectra.py",
            "versions": {"python": platform.python_version(), "numpy": np.__version__, "scipy": scipy.__version__},
            "pairs": pairs,
        },
        sys.stdout,
        indent=1,
    )
    print()


if __name__ == "__main__":
    main()
