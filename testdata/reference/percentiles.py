"""Writes percentiles.json beside this file: invented samples of many sizes with
the statistics that NumPy gives of them. Needs Debian's python3-numpy.

numpy.percentile's default method "linear" is definition 7 of R. J. Hyndman and
Y. Fan, Sample quantiles in statistical packages, The American Statistician
50(4), 1996."""
import json
import os
import sys

import numpy as np

PERCENTS = [0, 2.5, 5, 16, 25, 50, 75, 84, 95, 97.5, 100]
rng = np.random.default_rng(1)
cases = []
for n in [1, 2, 3, 4, 5, 7, 10, 16, 25, 50]:
    x = np.round(rng.lognormal(-2, 0.8, n), 6)
    cases.append({
        "x": x.tolist(),
        "percentiles": np.percentile(x, PERCENTS).tolist(),
        "mean": x.mean(),
        "log_mean": np.exp(np.log(x).mean()),
        "log_std": np.log(x).std(ddof=1) if n > 1 else None,
    })
out = {
    "made_by": "percentiles.py with NumPy %s, Python %s" % (np.__version__, sys.version.split()[0]),
    "percents": PERCENTS,
    "cases": cases,
}
with open(os.path.join(os.path.dirname(os.path.abspath(__file__)), "percentiles.json"), "w") as f:
    json.dump(out, f, indent=1)
    f.write("\n")
