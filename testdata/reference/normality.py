"""Writes normality.json beside this file: invented positive samples with the statistic
of Anderson and Darling of their logarithms from SciPy, and the probability from R's
package nortest, which has it by the same formulas. Needs Debian's python3-scipy and
r-cran-nortest.

SciPy gives A2 as it is; the factor for a finite sample, 1 + 0.75/n + 2.25/n**2, is
taken where it is compared. "outlier" samples have a value that lies up to 30 standard
deviations from the mean, where a normal distribution function of doubles is 0 or 1."""
import json
import os
import subprocess
import sys

import numpy as np
import scipy
from scipy.stats import anderson

rng = np.random.default_rng(17)
DRAW = {
    "lognormal": lambda n: rng.lognormal(-2, 0.7, n),
    "exponential": lambda n: rng.exponential(0.2, n),
    "two kinds": lambda n: np.exp(np.where(rng.random(n) < 0.4, -4.0, 0.0) + 0.3 * rng.standard_normal(n)),
    "uniform": lambda n: np.exp(rng.random(n)),
    "outlier": lambda n: np.append(rng.lognormal(-2, 0.1, n - 1), 1e-6),
}


def probability(x):
    code = "cat(format(nortest::ad.test(log(scan('stdin', quiet=TRUE)))$p.value, digits=15))"
    text = "\n".join(repr(float(v)) for v in x)
    return float(subprocess.run(["Rscript", "-e", code], input=text, capture_output=True, text=True, check=True).stdout)


cases = []
for kind, draw in DRAW.items():
    for n in [8, 15, 40, 150] + [900] * (kind == "outlier"):
        x = np.sort([float("%.5g" % v) for v in draw(n)])
        cases.append({"kind": kind, "a2": float(anderson(np.log(x)).statistic), "p": probability(x), "x": x.tolist()})
version = subprocess.run(["Rscript", "-e", "cat(R.version$major, R.version$minor, format(packageVersion('nortest')))"],
                         capture_output=True, text=True, check=True).stdout.split()
made_by = "normality.py with SciPy %s, Python %s, R %s.%s, nortest %s" % (
    scipy.__version__, sys.version.split()[0], *version)
with open(os.path.join(os.path.dirname(os.path.abspath(__file__)), "normality.json"), "w") as f:
    f.write("{\n \"made_by\": %s,\n \"cases\": [\n" % json.dumps(made_by))
    f.write(",\n".join("  " + json.dumps(c) for c in cases) + "\n ]\n}\n")
