"""Chances of being picked, worked out by SciPy, to hold shared/odds against: prints tests/outside/odds_scipy.json.

Not needed to install or to test. Debian: apt-get install python3-scipy, then
    /usr/bin/python3 tests/development/odds-against-scipy.py > tests/outside/odds_scipy.json

- wallenius: lists of two ticket counts, one-prize-each. The mean of Wallenius's noncentral hypergeometric distribution
  (scipy.stats.nchypergeom_wallenius) over the number of entrants is the chance of each.
- quad: any list, one-prize-each. 1 - integral of w exp(-w t) P(fewer than K others by t) dt by scipy.integrate.quad, the
  Poisson-binomial distribution of the others by the plain recurrence: another road than the product's.
- hypergeom: every-ticket, scipy.stats.hypergeom.sf(0, ...).
"""

import json
import platform

import numpy
import scipy
from scipy.integrate import quad
from scipy.stats import hypergeom, nchypergeom_wallenius


def wallenius(light, light_tickets, heavy, heavy_tickets, picks):
    law = nchypergeom_wallenius(light + heavy, heavy, picks, heavy_tickets / light_tickets)
    mean = float(law.mean())
    return [(picks - mean) / light, mean / heavy]


def fewer_than(counts, picks, t):
    """P(fewer than `picks` of the entrants with these ticket counts have rung by t)."""
    row = numpy.zeros(picks)
    row[0] = 1.0
    for tickets, entrants in counts:
        q = -numpy.expm1(-tickets * t)
        for _ in range(entrants):
            row[1:] = row[1:] * (1 - q) + row[:-1] * q
            row[0] *= 1 - q
    return float(row.sum())


def by_quad(groups, picks):
    total = sum(t * n for t, n in groups)
    chances = []
    for own, _ in groups:
        others = [(t / total, n - (t == own)) for t, n in groups]
        rate = own / total
        # Substituting t = x / (1 - x) would hide the bend: the interval is cut at the bulk instead.
        f = lambda t: rate * numpy.exp(-rate * t) * fewer_than(others, picks, t)
        cuts = [0] + [picks * c for c in (0.25, 0.5, 0.75, 1, 1.25, 1.5, 2, 3, 5, 10, 30, 100)]
        chances.append(sum(quad(f, a, b, epsabs=1e-15, epsrel=1e-12, limit=200)[0] for a, b in zip(cuts, cuts[1:])))
    return chances


two = [(90, 1, 10, 5, 12), (1000, 2, 50, 7, 100), (5, 1, 3, 40, 4), (200, 3, 300, 4, 20), (2000, 1, 20, 25, 60)]
lists = [
    ([(1, 30), (2, 20), (5, 10), (20, 3)], 5),
    ([(1, 12), (3, 9), (4, 4), (11, 2), (60, 1)], 10),
    ([(1, 200), (5, 80), (10, 40), (50, 5), (200, 1)], 25),
]
tickets = [(142, 7, 3), (1000, 1, 10), (8420, 5, 9), (100000, 250, 40), (5000000, 3000, 2500), (10**9, 10**6, 10**4), (60, 40, 19)]

print(
    json.dumps(
        {
            "_source": "tests/development/odds-against-scipy.py",
            "_versions": {"python": platform.python_version(), "scipy": scipy.__version__, "numpy": numpy.__version__, "system": "Debian 12"},
            "wallenius": [
                {"groups": [[b, a], [d, c]], "picks": k, "chances": wallenius(a, b, c, d, k)} for a, b, c, d, k in two
            ],
            "quad": [{"groups": g, "picks": k, "chances": by_quad(g, k)} for g, k in lists],
            "hypergeom": [
                {"total": n, "tickets": w, "picks": k, "chance": float(hypergeom.sf(0, n, w, k))} for n, w, k in tickets
            ],
        },
        indent=1,
    )
)
