"""Closed forms that lose digits near zero, with 60 digits from mpmath. Run: python3 make.py > values.json

ratio   variance over lag-one covariance of r_k = x_{k+1} - e x_k, the quasi-differences of the displacements x of the
        free process, from the displacement covariances of Uhlenbeck & Ornstein (1930)
gain    k/K of the Brownian oscillator: K and G solve, for the transition matrix A = exp(B dt), the two equations
        q'' - 2 q' + q = -K dt^2 q' - (G dt / 2) (q'' - q)   for every (q, v), with q' = A, q'' = A^2
"""

import json
import sys

import mpmath
from mpmath import expm, mp, mpf, tanh

mp.dps = 60
ratios = []
for text in ("1e-6", "0.001", "0.005", "0.0099", "0.0101", "0.05", "0.1", "0.25", "0.5", "0.75", "0.95", "-0.3"):
    half = mpf(text)
    x = 2 * mpmath.atanh(half)
    e = mpmath.exp(-x)
    own, first = 2 * (x - 1 + e), (1 - e) ** 2
    second = first * e
    variance = (1 + e * e) * own - 2 * e * first
    covariance = (1 + e * e) * first - e * (own + second)
    ratios.append([float(half), float(variance / covariance)])
gains = []
for friction in ("0.01", "0.1", "0.5", "1.5", "3"):
    for stiffness in ("-0.02", "1e-5", "0.0025", "0.04", "0.3", "1", "1.9"):
        g, k = mpf(friction), mpf(stiffness)
        step = expm(mpmath.matrix([[0, 1], [-k, -g]]))
        twice = step * step
        # unknown (K, G/2), one equation per starting state (1, 0) and (0, 1), dt = 1
        rows, right = mpmath.matrix(2, 2), mpmath.matrix(2, 1)
        for column in (0, 1):
            start = mpf(1 - column)
            rows[column, 0] = step[0, column]
            rows[column, 1] = twice[0, column] - start
            right[column] = -(twice[0, column] - 2 * step[0, column] + start)
        effective, half = mpmath.lu_solve(rows, right)
        gains.append(dict(friction=float(g), stiffness=float(k), half=float(half), effective=float(effective), gain=float(k / effective)))
        assert abs(half - tanh(g / 2)) < mpf(10) ** -40
json.dump(dict(source=f"mpmath {mpmath.__version__}, python {sys.version.split()[0]}", ratios=ratios, gains=gains), sys.stdout, indent=1)
