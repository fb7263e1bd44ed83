"""Least-squares fit of an autoregression of order one, from numpy.linalg.lstsq. Run: python3 make.py > autoregression.json"""

import json
import sys

import numpy as np

rng = np.random.default_rng(7)
series = [0.4]
for _ in range(199):
    series.append(0.3 + 0.8 * series[-1] + 0.5 * rng.standard_normal())
y = np.round(np.array(series), 6)
design = np.column_stack([np.ones(len(y) - 1), y[:-1]])
coefficients, squares, _, _ = np.linalg.lstsq(design, y[1:], rcond=None)
freedom = len(y) - 3
deviation = np.sqrt(squares[0] / freedom)
errors = deviation * np.sqrt(np.diag(np.linalg.inv(design.T @ design)))
determination = 1 - squares[0] / np.sum((y[1:] - y[1:].mean()) ** 2)
json.dump(
    dict(source=f"numpy.linalg.lstsq {np.__version__}, python {sys.version.split()[0]}", series=y.tolist(),
         coefficients=coefficients.tolist(), standardErrors=errors.tolist(), residualDeviation=float(deviation),
         determination=float(determination)), sys.stdout, separators=(",", ":"))
