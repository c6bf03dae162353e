"""Writes geodesy.json: lines on ellipsoids, by integration of the geodesic's equation.

    /usr/bin/python3 geodesy.py > geodesy.json

A geodesic is the path of a point that is held on the surface and feels no other
force. In space, with N = (x/a², y/a², z/b²) normal to the surface,

    r'' = -((x'**2 + y'**2)/a**2 + z'**2/b**2) / |N|**2 * N

by arc length, which knows nothing of reduced latitudes, auxiliary spheres or poles.
It is integrated with 34 digits (mpmath) by extrapolated midpoint steps (Gragg), two
orders of which agree within 1e-20. Lines that keep away from the poles are checked
with solve_ivp (DOP853, rtol 1e-13) of the equations in latitude, longitude and
azimuth.

A line is the shortest between its ends as long as its arc on the auxiliary sphere is
less than half a turn, which on an oblate ellipsoid is a length of
2*b*E(-k**2), E the complete elliptic integral: at least pi*b.

"published" are the starts, azimuths and lengths of lines in print, given from
memory: Vincenty, "Direct and inverse solutions of geodesics on the ellipsoid with
application of nested equations", Survey Review 23(176), 1975, table 2, and Karney
(2013), tables 2 to 4. The rest is random, on WGS-84.
"""

import json
import platform
import random
import sys

import mpmath
import numpy as np
import scipy
from mpmath import mp, mpf
from scipy.integrate import solve_ivp

mp.dps = 34
WGS84 = (6378137.0, 298.257223563)
INTERNATIONAL = (6378388.0, 297.0)
BESSEL = (6377397.155, 299.1528128)


def dms(d, m, s):
    return d + m / 60 + s / 3600


# name, ellipsoid, latitude, azimuth, length
PUBLISHED = [
    ("Vincenty a", BESSEL, dms(55, 45, 0), dms(96, 36, 8.79960), 14110526.170),
    ("Vincenty b", INTERNATIONAL, dms(37, 19, 54.95367), dms(95, 27, 59.63089), 4085966.703),
    ("Vincenty c", INTERNATIONAL, dms(35, 16, 11.24862), dms(15, 44, 23.74850), 8084823.839),
    ("Vincenty d", INTERNATIONAL, 1.0, 89.0, 19960000.000),
    ("Vincenty e", INTERNATIONAL, 1.0, dms(4, 59, 59.99995), 19780006.5584),
    ("Karney table 2", WGS84, 40.0, 30.0, 10000000.0),
    ("Karney table 3", WGS84, -30.12345, 77.04353354237, 4.944208),
    ("Karney table 4", WGS84, -30.0, 161.89052473633, 19989832.827610),
]


def acceleration(r, v, b2):
    n = (r[0], r[1], r[2] / b2)
    pull = -(v[0] * v[0] + v[1] * v[1] + v[2] * v[2] / b2) / (n[0] * n[0] + n[1] * n[1] + n[2] * n[2])
    return [pull * c for c in n]


def midpoint(y, h, n, b2):
    f = lambda y: y[3:] + acceleration(y[:3], y[3:], b2)
    d = h / n
    before, now = y, [p + d * q for p, q in zip(y, f(y))]
    for _ in range(n - 1):
        before, now = now, [p + 2 * d * q for p, q in zip(before, f(now))]
    return [(p + q + d * s) / 2 for p, q, s in zip(before, now, f(now))]


def step(y, h, b2, orders=12):
    rows = []
    for j in range(1, orders + 1):
        row = [midpoint(y, h, 2 * j, b2)]
        for i in range(1, j):
            ratio = mpf(j) ** 2 / mpf(j - i) ** 2 - 1
            row.append([p + (p - q) / ratio for p, q in zip(row[i - 1], rows[-1][i - 1])])
        rows.append(row)
    assert max(abs(p - q) for p, q in zip(rows[-1][-1], rows[-1][-2])) < mpf(10) ** -20
    return rows[-1][-1]


def end(ellipsoid, latitude, azimuth, length):
    """Latitude, longitude and azimuth in degrees at the end of a line."""
    f = 1 / mpf(ellipsoid[1])
    b2, e2 = (1 - f) ** 2, f * (2 - f)  # in units of a
    phi, alpha = mpf(latitude) * mp.pi / 180, mpf(azimuth) * mp.pi / 180
    normal = 1 / mp.sqrt(1 - e2 * mp.sin(phi) ** 2)
    y = [normal * mp.cos(phi), mpf(0), b2 * normal * mp.sin(phi)]
    y += [-mp.cos(alpha) * mp.sin(phi), mp.sin(alpha), mp.cos(alpha) * mp.cos(phi)]
    whole = mpf(length) / mpf(ellipsoid[0])
    steps = max(1, int(mp.ceil(whole / 0.25)))
    for _ in range(steps):
        y = step(y, whole / steps, b2)
    lam, phi = mp.atan2(y[1], y[0]), mp.atan2(y[2] / b2, mp.hypot(y[0], y[1]))
    east = y[4] * mp.cos(lam) - y[3] * mp.sin(lam)
    north = y[5] * mp.cos(phi) - (y[3] * mp.cos(lam) + y[4] * mp.sin(lam)) * mp.sin(phi)
    return [float(angle * 180 / mp.pi) for angle in (phi, lam, mp.atan2(east, north))]


def by_angles(ellipsoid, latitude, azimuth, length):
    f = 1 / ellipsoid[1]
    e2 = f * (2 - f)

    def equations(_, y):
        root = np.sqrt(1 - e2 * np.sin(y[0]) ** 2)
        meridian, normal = (1 - e2) / root**3, 1 / root
        return [np.cos(y[2]) / meridian, np.sin(y[2]) / normal / np.cos(y[0]), np.tan(y[0]) * np.sin(y[2]) / normal]

    start = [np.radians(latitude), 0, np.radians(azimuth)]
    done = solve_ivp(equations, [0, length / ellipsoid[0]], start, method="DOP853", rtol=1e-13, atol=1e-15)
    return np.degrees(done.y[:, -1])


def half_turn(ellipsoid, latitude, azimuth):
    """The length of half a turn on the auxiliary sphere, in m."""
    a, f = mpf(ellipsoid[0]), 1 / mpf(ellipsoid[1])
    beta = mp.atan((1 - f) * mp.tan(mpf(latitude) * mp.pi / 180))
    sin0 = mp.sin(mpf(azimuth) * mp.pi / 180) * mp.cos(beta)
    k2 = f * (2 - f) / (1 - f) ** 2 * (1 - sin0 * sin0)
    return 2 * a * (1 - f) * mp.ellipe(-k2)


def invented():
    rng = random.Random(1840)
    azimuth = lambda: round(rng.uniform(-180, 180), 6)
    latitude = lambda: round(rng.uniform(-90, 90), 6)
    for _ in range(60):
        yield "any", latitude(), azimuth(), round(10 ** rng.uniform(3, 7.29), 3)
    for _ in range(30):
        yield "short", latitude(), azimuth(), round(10 ** rng.uniform(-2, 3), 6)
    for _ in range(60):
        phi, alpha = latitude(), azimuth()
        yield "nearly antipodal", phi, alpha, float(half_turn(WGS84, phi, alpha) - mpf(10) ** rng.uniform(0, 5))
    for _ in range(20):
        phi, alpha = round(rng.uniform(-1, 1) * 10 ** rng.uniform(-6, 0), 9), azimuth()
        yield "antipodal near the equator", phi, alpha, float(half_turn(WGS84, phi, alpha) - mpf(10) ** rng.uniform(0, 4.5))
    for _ in range(20):
        alpha = rng.choice([0, 180]) + round(10 ** rng.uniform(-9, -1), 12)
        yield "past a pole", latitude(), alpha, round(rng.uniform(1e6, 1.99e7), 3)
    for _ in range(10):
        yield "along the equator", 0.0, 90.0, round(rng.uniform(1e3, 1.99e7), 3)


def line(name, ellipsoid, latitude, azimuth, length):
    phi, lam, alpha = end(ellipsoid, latitude, azimuth, length)
    if abs(np.sin(np.radians(azimuth)) * np.cos(np.radians(latitude))) > 0.1:
        other = by_angles(ellipsoid, latitude, azimuth, length) - [phi, lam, alpha]
        worst = abs((other + 180) % 360 - 180).max()
        CHECKED.append(worst)
        assert worst < 1e-9, (name, latitude, azimuth, length, other)
    return {
        "name": name, "equatorial_m": ellipsoid[0], "inverse_flattening": ellipsoid[1], "latitude1": latitude,
        "azimuth1": azimuth, "length_m": length, "latitude2": phi, "longitude2": lam, "azimuth2": alpha,
    }  # fmt: skip


CHECKED = []


def main():
    published = [line(*p) for p in PUBLISHED]
    lines = [line(name, WGS84, *rest) for name, *rest in invented()]
    print("%d lines checked by solve_ivp, greatest difference %.1e degrees" % (len(CHECKED), max(CHECKED)), file=sys.stderr)
    head = {
        "provenance": "written by geodesy.py beside this file; longitude1 is 0",
        "versions": {"python": platform.python_version(), "mpmath": mpmath.__version__, "numpy": np.__version__, "scipy": scipy.__version__},
    }
    print(json.dumps(head, indent=1)[:-2] + ",")
    for key, rows in ("published", published), ("lines", lines):
        print(f' "{key}": [\n  ' + ",\n  ".join(json.dumps(r) for r in rows) + "\n ]" + ("," if key == "published" else ""))
    print("}")


if __name__ == "__main__":
    main()
