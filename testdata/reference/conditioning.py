"""Writes conditioning.json: filters, trends, resampling and spectra of an invented series,
by SciPy and NumPy.

    /usr/bin/python3 conditioning.py > conditioning.json

The series is made up, and every sample is an integer over 1024, exact in binary, so
that a test can make the very same samples:

    x(0) = seed,  x(i) = (1103515245*x(i-1) + 12345) mod 2**31
    sample(i) = (x(i)//2**16 - 2**14) / 1024,   i = 1 .. n
"""

import json
import platform
import sys

import numpy as np
import scipy
from scipy import signal

N, SEED, STEP_S = 250, 4711, 0.01


def samples(n, seed):
    x, out = seed, []
    for _ in range(n):
        x = (1103515245 * x + 12345) % 2**31
        out.append((x // 2**16 - 2**14) / 1024)
    return np.array(out)


def two_way(sos, x):
    once = signal.sosfilt(sos, x)
    return signal.sosfilt(sos, once[::-1])[::-1]


def bells(n, ends):
    w = np.ones(n)
    rise = (1 - np.cos(np.pi * (np.arange(ends) + 0.5) / ends)) / 2
    w[:ends], w[n - ends:] = rise, rise[::-1]
    return w


x = samples(N, SEED)
filters = []
for kind, corner in [("lowpass", 20.0), ("highpass", 1.0), ("highpass", 0.1)]:
    for order in (1, 2, 3, 4, 8):
        sos = signal.butter(order, corner, btype=kind, fs=1 / STEP_S, output="sos")
        frequencies = [0.05, 0.3, 2.0, 17.0, 41.0]
        _, response = signal.sosfreqz(sos, worN=frequencies, fs=1 / STEP_S)
        filters.append({
            "kind": kind, "corner_hz": corner, "order": order, "filtered": two_way(sos, x).tolist(),
            "frequencies_hz": frequencies, "gain": (abs(response) ** 2).tolist(),
        })
for low, high in [(1.0, 20.0), (0.1, 25.0), (4.0, 5.0)]:
    for order in (1, 2, 3, 4, 8):
        sos = signal.butter(order, [low, high], btype="bandpass", fs=1 / STEP_S, output="sos")
        frequencies = [0.05, 0.3, 2.0, 4.5, 17.0, 41.0]
        _, response = signal.sosfreqz(sos, worN=frequencies, fs=1 / STEP_S)
        filters.append({
            "kind": "bandpass", "corner_hz": low, "high_hz": high, "order": order, "filtered": two_way(sos, x).tolist(),
            "frequencies_hz": frequencies, "gain": (abs(response) ** 2).tolist(),
        })
t = np.arange(N, dtype=float)
trends = [{"degree": d, "rest": (x - np.polyval(np.polyfit(t, x, d), t)).tolist()} for d in (0, 1, 2)]
resampled = []
for n, length in [(250, 250), (247, 250), (225, 240), (240, 240)]:
    padded = np.concatenate([x[:n], np.zeros(length - n)])
    for factor in (2, 5):
        resampled.append({"n": n, "factor": factor, "samples": signal.resample(padded, length * factor)[: n * factor].tolist()})
_, density = signal.periodogram(x[:247], fs=1 / STEP_S, window=bells(247, 12), nfft=250, detrend="constant", scaling="density")
json.dump({
    "tool": "SciPy %s, NumPy %s, Python %s" % (scipy.__version__, np.__version__, platform.python_version()),
    "n": N, "seed": SEED, "step_s": STEP_S, "filters": filters, "trends": trends, "resampled": resampled, "density_of_247": density.tolist(),
}, sys.stdout, indent=None, separators=(",", ":"))
print()
