"""One group of 6 lots of 8 pulls by statsmodels OLS on arrays: three models, both F tests, shelf life by root search.

usage: against_statsmodels.py PROGRAM   where PROGRAM is the built example group_of_lots
needs: python 3 with numpy, scipy and statsmodels. Prints both times, their ratio (goal: at least 500), and both results.
"""
import subprocess
import sys
import time

import numpy as np
import statsmodels.api as sm
from scipy import stats
from scipy.optimize import brentq

AGES = np.array([0.0, 3, 6, 9, 12, 18, 24, 36])
LIMIT, ALPHA, ROUNDS = 95.0, 0.25, 400
LOTS = 6


def data():
    i = np.repeat(np.arange(LOTS, dtype=float), len(AGES))
    j = np.tile(np.arange(len(AGES), dtype=float), LOTS)
    x = np.tile(AGES, LOTS)
    y = 100.5 + 0.3 * np.cos(i) - 0.1 * x + 0.4 * np.sin((i * 31 + j * 17) * 1.7)
    return i.astype(int), x, y


def evaluate(lot, x, y):
    own = np.zeros((len(x), LOTS))
    own[np.arange(len(x)), lot] = 1.0
    designs = [np.hstack([own, own * x[:, None]]), np.hstack([own, x[:, None]]), sm.add_constant(x)]
    separate, slope, line = (sm.OLS(y, design).fit() for design in designs)
    f1 = ((slope.ssr - separate.ssr) / (LOTS - 1)) / (separate.ssr / separate.df_resid)
    p1 = stats.f.sf(f1, LOTS - 1, separate.df_resid)
    f2 = ((line.ssr - slope.ssr) / (LOTS - 1)) / (slope.ssr / slope.df_resid)
    p2 = stats.f.sf(f2, LOTS - 1, slope.df_resid)
    if p1 < ALPHA:
        model, rows = separate, [lambda t, k=k: np.hstack([np.eye(LOTS)[k], np.eye(LOTS)[k] * t]) for k in range(LOTS)]
    elif p2 < ALPHA:
        model, rows = slope, [lambda t, k=k: np.append(np.eye(LOTS)[k], t) for k in range(LOTS)]
    else:
        model, rows = line, [lambda t: np.array([1.0, t])]
    quantile, cover, beta = stats.t.ppf(0.95, model.df_resid), model.cov_params(), model.params

    def margin(t, row):
        r = row(t)
        return r @ beta - quantile * np.sqrt(r @ cover @ r) - LIMIT

    roots = [brentq(margin, 0.0, 600.0, args=(row,)) for row in rows if margin(600.0, row) < 0 < margin(0.0, row)]
    return p1, p2, min(roots)


def main():
    lot, x, y = data()
    evaluate(lot, x, y)
    times = []
    for _ in range(ROUNDS):
        began = time.perf_counter()
        found = evaluate(lot, x, y)
        times.append(time.perf_counter() - began)
    theirs = min(times) * 1e6
    out = subprocess.run([sys.argv[1]], capture_output=True, text=True, check=True).stdout.split()
    ours, p1, p2, months = float(out[0]) / 1000, float(out[1]), float(out[2]), float(out[3])
    print(f"statsmodels {theirs:.0f} us a group, here {ours:.2f} us: ratio {theirs / ours:.0f} (goal: at least 500)")
    print(f"p slopes {found[0]:.12f} {p1:.12f}; p intercepts {found[1]:.12f} {p2:.12f}; months {found[2]:.8f} {months:.8f}")
    assert abs(found[0] - p1) < 1e-9 and abs(found[1] - p2) < 1e-9 and abs(found[2] - months) < 1e-6, "they differ"


main()
