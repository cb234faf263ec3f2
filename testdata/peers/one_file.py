"""Pools one small file of counts with a general statistics library, for comparison.

usage: one_file.py FILE

FILE has the columns study, treated events, treated total, control events, control
total, as testdata/checks/bcg_counts.csv does. Prints the DerSimonian-Laird mean of the
log risk ratios with its 95 % interval and p.
"""

import csv
import sys

import numpy as np
from scipy import stats


def column(rows, *words):
    for name in rows[0]:
        if all(word in name.lower() for word in words):
            return np.array([float(row[name]) for row in rows])
    raise SystemExit(f"no column of {' '.join(words)}")


with open(sys.argv[1], encoding="utf-8", newline="") as file:
    rows = list(csv.DictReader(file))
a, n1 = column(rows, "events", "treat"), column(rows, "total", "treat")
c, n2 = column(rows, "events", "control"), column(rows, "total", "control")
y = np.log(a / n1) - np.log(c / n2)
v = 1 / a - 1 / n1 + 1 / c - 1 / n2
w = 1 / v
mean = (w * y).sum() / w.sum()
q = (w * (y - mean) ** 2).sum()
tau2 = max(0.0, (q - (len(y) - 1)) / (w.sum() - (w * w).sum() / w.sum()))
w = 1 / (v + tau2)
mean, se = (w * y).sum() / w.sum(), (1 / w.sum()) ** 0.5
half = stats.norm.ppf(0.975) * se
print(f"{mean:.6f} {mean - half:.6f} {mean + half:.6f} tau2 {tau2:.6f} p {2 * stats.norm.sf(abs(mean / se)):.3g}")
