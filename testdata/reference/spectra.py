"""Writes spectra.json: spectral displacements of invented motions, by SciPy.

    /usr/bin/python3 spectra.py > spectra.json

Two computations that share nothing with swaybook's solver nor with each other:

  expm   the matrix exponential (scipy.linalg.expm) of the oscillator together
         with its straight-line load, marched over pieces of a step no longer
         than 0.02/omega and ten or more a step, and the maxima of the cubic
         Hermite interpolants in between: within about 0.02**4/384 = 4e-10 of
         the continuous maximum.
  ivp    scipy.integrate.solve_ivp, DOP853, rtol 1e-12, restarted at every
         sample, with the turning points found on its dense output; for a few
         oscillators of each motion.

The motion begins from rest at the first sample, is linear between samples and
stops after the last, where the free ringing is followed for a period and a half.

The motions are made up, no records of anything, and every sample is an integer
over 1024, exact in binary, so that a test can make the very same samples:

    x(0) = seed,  x(i) = (1103515245*x(i-1) + 12345) mod 2**31
    noise(i) = x(i)//2**16 - 2**14,          i = 1 .. n
    walk(i)  = walk(i-1) + (noise(i) - walk(i-1))//4,   walk(0) = 0
    envelope = min(8*i, n - i + tail)
    sample(i) = (walk(i)*envelope(i))//n / 1024   in m/s2

with // the division that rounds down (to minus infinity). A tail above 0 lets
the motion stop short of zero.
"""

import json
import platform
import sys

import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.linalg import expm
from scipy.optimize import brentq

MOTIONS = [
    {"name": "Invented A", "step_s": 0.005, "n": 800, "seed": 1971, "tail": 0},
    {"name": "Invented B", "step_s": 0.01, "n": 600, "seed": 42, "tail": 0},
    {"name": "Invented C", "step_s": 0.02, "n": 400, "seed": 90210, "tail": 150},
]
DAMPINGS = [0.0, 0.02, 0.05, 0.10, 0.20]
PERIODS = [float("%.3g" % p) for p in np.geomspace(0.01, 10, 37)]
IVP = [(0.02, 0.05), (0.0681, 0.0), (0.147, 0.2), (0.464, 0.05), (1.0, 0.02), (3.16, 0.1), (10.0, 0.0)]


def samples(n, seed, tail):
    x, walk, out = seed, 0, []
    for i in range(1, n + 1):
        x = (1103515245 * x + 12345) % 2**31
        walk += (x // 2**16 - 2**14 - walk) // 4
        out.append((walk * min(8 * i, n - i + tail)) // n)
    return out


def system(omega, damping):
    """F of dz/dt = F z for z = (u, v, a, slope of a)."""
    f = np.zeros((4, 4))
    f[0, 1] = f[2, 3] = 1
    f[1] = [-omega**2, -2 * damping * omega, -1, 0]
    return f


def hermite_peak(u, v, h):
    """Greatest |u| of the cubics through u with slopes v at points h apart."""
    best = np.abs(u).max()
    for k in np.nonzero(v[:-1] * v[1:] < 0)[0]:
        d = u[k + 1] - u[k]
        p, q = v[k] * h, v[k + 1] * h
        cubic = np.array([p + q - 2 * d, 3 * d - 2 * p - q, p, u[k]])
        for t in np.roots(np.polyder(cubic)):
            if abs(t.imag) < 1e-12 and 0 <= t.real <= 1:
                best = max(best, abs(np.polyval(cubic, t.real)))
    return best


def history(a, step, period, damping, phase=0.02):
    """Displacements and velocities at points h apart, and h: pieces of a step of
    at most phase/omega, ten or more a step, through a period and a half of ringing."""
    omega = 2 * np.pi / period
    pieces = max(10, int(np.ceil(omega * step / phase)))
    h = step / pieces
    e = expm(system(omega, damping) * h)
    m, load, ramp = e[:2, :2], e[:2, 2], e[:2, 3]
    slope = np.repeat(np.diff(a), pieces) / step
    at = np.repeat(a[:-1], pieces) + slope * h * np.tile(np.arange(pieces), len(a) - 1)
    forced = np.outer(at, load) + np.outer(slope, ramp)
    ringing = int(np.ceil(1.5 * period / h))
    forced = np.vstack([forced, np.zeros((ringing, 2))])
    (m00, m01), (m10, m11) = m.tolist()
    u, v = 0.0, 0.0
    us, vs = [u], [v]
    for p, q in forced.tolist():
        u, v = m00 * u + m01 * v + p, m10 * u + m11 * v + q
        us.append(u)
        vs.append(v)
    return np.array(us), np.array(vs), h


def by_expm(a, step, period, damping):
    return hermite_peak(*history(a, step, period, damping))


def by_ivp(a, step, period, damping):
    omega = 2 * np.pi / period

    def dense_peak(z, a0, slope, length):
        def f(t, z):
            return [z[1], -(a0 + slope * t) - 2 * damping * omega * z[1] - omega**2 * z[0]]

        scale = max(1e-9, np.abs(a).max() / omega**2) * 1e-13
        s = solve_ivp(f, (0, length), z, method="DOP853", rtol=1e-12, atol=[scale, scale * omega], dense_output=True)
        # Twelve pieces a period and no fewer than four a step separate the zeros.
        t = np.linspace(0, length, 4 + int(12 * length / period))
        y = s.sol(t)
        best = np.abs(y[0]).max()
        for k in np.nonzero(y[1][:-1] * y[1][1:] < 0)[0]:
            at = brentq(lambda x: s.sol(x)[1], t[k], t[k + 1], xtol=1e-14)
            best = max(best, abs(s.sol(at)[0]))
        return best, s.y[:, -1]

    z, best = np.zeros(2), 0.0
    for k in range(len(a) - 1):
        peak, z = dense_peak(z, a[k], (a[k + 1] - a[k]) / step, step)
        best = max(best, peak)
    peak, _ = dense_peak(z, 0.0, 0.0, 1.5 * period)
    return max(best, peak)


def main():
    motions = []
    for m in MOTIONS:
        whole = samples(m["n"], m["seed"], m["tail"])
        a = np.array(whole) / 1024
        sd = [[by_expm(a, m["step_s"], p, z) for p in PERIODS] for z in DAMPINGS]
        subset = []
        for p, z in IVP:
            d, other = by_ivp(a, m["step_s"], p, z), by_expm(a, m["step_s"], p, z)
            print(m["name"], p, z, "ivp/expm - 1 = %.1e" % (d / other - 1), file=sys.stderr)
            assert abs(d / other - 1) < 1e-8, (m["name"], p, z, d, other)
            subset.append({"period_s": p, "damping": z, "sd_m": d})
        motions.append({**m, "sum_of_1024ths": sum(whole), "sum_of_squares": sum(k * k for k in whole), "expm_sd_m": sd, "ivp": subset})
    json.dump(
        {
            "provenance": "written by spectra.py beside this file; invented motions, see its head",
            "versions": {"python": platform.python_version(), "numpy": np.__version__, "scipy": scipy.__version__},
            "dampings": DAMPINGS,
            "periods_s": PERIODS,
            "motions": motions,
        },
        sys.stdout,
        indent=1,
    )
    print()


if __name__ == "__main__":
    main()
