"""B-spline values on uniform knots, from scipy.interpolate.BSpline. Run: python3 make.py > values.json"""

import json
import sys

import numpy as np
import scipy
from scipy.interpolate import BSpline


def elements(count, low, high, cells, degree):
    """All B-splines of a degree on uniform knots that reach into the box."""
    width = (high - low) / cells
    knots = low + width * np.arange(-degree, cells + degree + 1)
    return [BSpline.basis_element(knots[i : i + degree + 2], extrapolate=False) for i in range(cells + degree)]


def values(functions, places, order):
    rows = []
    for place in places:
        row = []
        for function in functions:
            piece = function.derivative(order) if order else function
            row.append(float(np.nan_to_num(piece(place))))
        rows.append(row)
    return rows


cases = []
for count, low, high in [(4, 0.0, 1.0), (7, -1.5, 2.5), (12, 3.0, 3.9)]:
    functions = elements(count, low, high, count - 3, 3)
    places = (low + (high - low) * np.array([0.013, 0.11, 0.29, 0.41, 0.57, 0.71, 0.93, 0.999])).tolist()
    cases.append(
        dict(periodic=False, count=count, low=low, high=high, places=places,
             values=values(functions, places, 0), slopes=values(functions, places, 1))
    )
for count, low, high in [(2, 0.0, 1.0), (3, 0.0, 2.0), (5, 0.0, 4.0), (8, 0.0, 3.0)]:
    functions = elements(count, low, high, count, 3)
    places = (low + (high - low) * np.array([0.013, 0.11, 0.29, 0.41, 0.57, 0.71, 0.93, 0.999])).tolist()
    wrapped = []
    for order in (0, 1):
        rows = np.zeros((len(places), count))
        for index, column in enumerate(np.array(values(functions, places, order)).T):
            rows[:, index % count] += column
        wrapped.append(rows.tolist())
    cases.append(
        dict(periodic=True, count=count, low=low, high=high, places=places, values=wrapped[0], slopes=wrapped[1])
    )
json.dump(
    dict(source=f"scipy.interpolate.BSpline {scipy.__version__}, numpy {np.__version__}, python {sys.version.split()[0]}",
         cases=cases), sys.stdout, indent=1)
