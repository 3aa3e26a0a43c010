"""Tail probabilities and rank correlations by SciPy, to hold shared/statistics against: prints tests/outside/statistics_scipy.json.

Not needed to install or to test. Debian: apt-get install python3-scipy, then
    /usr/bin/python3 tests/development/statistics-against-scipy.py > tests/outside/statistics_scipy.json
"""

import csv
import json
import platform

import numpy
import scipy
from scipy import special, stats

with open("tests/outside/conscription_draw_1970.csv") as file:
    rows = [(int(row["Day"]), int(row["Rank"])) for row in csv.DictReader(file)]
draft = stats.spearmanr([day for day, _ in rows], [rank for _, rank in rows])
shuffled = [(i * 37 + 11) % 101 for i in range(101)]
other = stats.spearmanr(range(101), shuffled)

print(
    json.dumps(
        {
            "_source": "tests/development/statistics-against-scipy.py",
            "_versions": {"python": platform.python_version(), "scipy": scipy.__version__, "numpy": numpy.__version__, "system": "Debian 12"},
            "chi_square": [[x, k, stats.chi2.sf(x, k)] for x, k in [(3.841, 1), (0.001, 1), (18.307, 10), (30, 10), (124.342, 100), (200, 100), (255, 255), (300, 255), (5, 40)]],
            "normal": [[z, 2 * stats.norm.sf(abs(z))] for z in (0.0, 0.1, 1.0, 1.959964, -2.575829, 4.0, 8.0)],
            "student": [[t, k, 2 * stats.t.sf(abs(t), k)] for t, k in [(0.5, 1), (2.228, 10), (-3.169, 10), (1.96, 364), (-4.42, 364), (12.0, 5), (0.01, 98)]],
            "log_gamma": [[x, float(special.gammaln(x))] for x in (0.1, 0.5, 1, 1.5, 2, 10, 127.5, 1000)],
            "spearman": {
                "conscription": [float(draft[0]), float(draft[1])],
                "shuffled": {"order": shuffled, "rho_p": [float(other[0]), float(other[1])]},
            },
        },
        indent=1,
    )
)
