"""Prints the one-way random-effects fit of the sample "singles" of mixed.json to 20
digits, by both methods: mean, tau, phi and the mean's standard error. Needs Debian's
python3-mpmath.

Nothing but the covariance matrix of all values is used: with V = I + lam*Z*Z' the
deviance is M*ln(r'V^-1 r/M) + ln|V|, plus ln(1'V^-1 1) for REML, and lam is where its
derivative, a difference with 50 digits, is 0."""
import json
import os

import mpmath
from mpmath import det, diff, findroot, log, lu_solve, matrix, mp, mpf, nstr, sqrt

mp.dps = 50
with open(os.path.join(os.path.dirname(os.path.abspath(__file__)), "mixed.json")) as f:
    case = {c["name"]: c for c in json.load(f)["cases"]}["singles"]
group, n = case["group"], len(case["y"])
ones, y = matrix([1] * n), matrix([mpf(v) for v in case["y"]])


def parts(lam):
    v = matrix(n, n)
    for i in range(n):
        for j in range(n):
            v[i, j] = (i == j) + (lam if group[i] == group[j] else 0)
    a = lu_solve(v, ones)
    information = (ones.T * a)[0]
    mu = (y.T * a)[0] / information
    r = y - mu * ones
    return v, mu, information, (r.T * lu_solve(v, r))[0]


print("mpmath", mpmath.__version__)
for method, members in [("reml", n - 1), ("ml", n)]:
    def deviance(lam):
        v, _, information, squares = parts(lam)
        return members * log(squares / members) + log(det(v)) + (log(information) if method == "reml" else 0)

    near = case["lme4_" + method]
    start = (near["tau"] / near["phi"])**2
    lam = findroot(lambda x: diff(deviance, x, h=mpf(10)**-16), (start, start * 1.0001), solver="secant",
                   tol=1e-40, verify=False)
    _, mu, information, squares = parts(lam)
    phi = sqrt(squares / members)
    print(method, *[nstr(x, 20) for x in (mu, sqrt(lam) * phi, phi, phi / sqrt(information))])
