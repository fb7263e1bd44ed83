"""Tails and quantiles of the distributions in use, from scipy.stats. Run: python3 make.py > values.json"""

import json
import sys

import scipy
from scipy.stats import chi2, f, norm, t

chi_square = [
    [x, n, float(chi2.sf(x, n))]
    for n in (1, 2, 3, 5, 10, 50, 300, 1999, 2001, 5000, 20000, 300000)
    for x in (0.05 * n, 0.8 * n, n - 0.5 * n**0.5, float(n), n + n**0.5, n + 4 * n**0.5, n + 15 * n**0.5)
]
fisher = [
    [x, a, b, float(f.sf(x, a, b))]
    for a, b in ((1, 4), (1, 200), (3, 9), (5, 60), (12, 1000), (40, 40), (2, 39000), (200, 20000))
    for x in (0.02, 0.5, 0.97, 1.3, 2.5, 7.0, 30.0)
]
normal_tail = [[x, float(norm.sf(x))] for x in (-8, -3.5, -1, -0.1, 0, 0.1, 0.67, 1.96, 3.3, 6, 10, 30, 37)]
normal_quantile = [
    [p, float(norm.ppf(p))]
    for p in (1e-300, 1e-20, 1e-6, 0.001, 0.02425, 0.1, 0.3, 0.5, 0.6, 0.9, 0.975, 0.9995, 1 - 1e-9)
]
student_quantile = [
    [p, n, float(t.ppf(p, n))] for n in (1, 2, 4.5, 9, 30, 79, 1e4, 3e6) for p in (0.6, 0.9, 0.95, 0.975, 0.995)
]
student_tail = [[x, n, float(2 * t.sf(x, n))] for n in (1, 3, 9, 30, 100) for x in (0.1, 1.0, 2.2, 5.0, 12.0)]
json.dump(
    dict(source=f"scipy.stats {scipy.__version__}, python {sys.version.split()[0]}", chiSquareTail=chi_square,
         fisherTail=fisher, normalTail=normal_tail, normalQuantile=normal_quantile,
         studentQuantile=student_quantile, studentTail=student_tail), sys.stdout, indent=None, separators=(",", ":"))
