"""Times what general-purpose libraries offer for response spectra.

    python3 lfilter.py [REPEATS]

The displacement of an oscillator under acceleration that is linear between
samples is a recursion of second order; SciPy derives it (first-order hold) and
filters with it, one call an oscillator, and NumPy takes the greatest sample. 231
periods from 0.01 to 10 s, five dampings, 8000 samples of noise, dt = 0.005 s.
Peaks between samples and the ringing after the last are left out. Prints the
oscillator-steps a second of the fastest repeat; deriving coefficients is not
timed.
"""

import sys
import time

import numpy as np
from scipy.signal import cont2discrete, lfilter

STEP_S, SAMPLES = 0.005, 8000
DAMPINGS = (0.0, 0.02, 0.05, 0.10, 0.20)


def recursion(period, damping):
    omega = 2 * np.pi / period
    numerator, denominator, _ = cont2discrete(([-1.0], [1.0, 2 * damping * omega, omega**2]), STEP_S, method="foh")
    return numerator.ravel(), denominator


def main():
    repeats = int(sys.argv[1]) if len(sys.argv) > 1 else 3
    filters = [recursion(t, z) for z in DAMPINGS for t in np.geomspace(0.01, 10, 231)]
    motion = np.random.default_rng(1).standard_normal(SAMPLES)
    fastest = np.inf
    for _ in range(repeats):
        start = time.perf_counter()
        for numerator, denominator in filters:
            np.abs(lfilter(numerator, denominator, motion)).max()
        fastest = min(fastest, time.perf_counter() - start)
    print("%.4g" % (len(filters) * SAMPLES / fastest))


if __name__ == "__main__":
    main()
