"""Polynomial least squares of certified hard cases in exact rational arithmetic.

    python3 make.py > certified.json

Data: NIST Statistical Reference Datasets, linear regression, higher difficulty. Filip (A. Filippelli, NIST) is read
from filip.txt; Wampler 1 to 5 (R. H. Wampler, J. Am. Stat. Assoc. 65 (1970) 549) are made from their formulas.
The normal equations are solved with fractions, so every digit printed is right whatever the condition number. The
coefficients that NIST publishes for Filip begin -1467.48961422980, -2772.17959193342, -2316.37108160893 and come out.
"""

import json
from decimal import Decimal, getcontext
from fractions import Fraction

getcontext().prec = 50


def root(value):
    return (Decimal(value.numerator) / Decimal(value.denominator)).sqrt()


def fit(x, y, degree):
    k = degree + 1
    rows = [[value**power for power in range(k)] for value in x]
    left = [[sum(row[i] * row[j] for row in rows) for j in range(k)] for i in range(k)]
    right = [sum(row[i] * value for row, value in zip(rows, y)) for i in range(k)]
    # Gauss-Jordan on [A | b | I]: exact, so no pivoting for size.
    work = [left[i] + [right[i]] + [Fraction(int(i == j)) for j in range(k)] for i in range(k)]
    for i in range(k):
        pivot = work[i][i]
        work[i] = [value / pivot for value in work[i]]
        for other in range(k):
            if other != i:
                factor = work[other][i]
                work[other] = [a - factor * b for a, b in zip(work[other], work[i])]
    coefficients = [row[k] for row in work]
    residuals = [value - sum(c * r for c, r in zip(coefficients, row)) for row, value in zip(rows, y)]
    variance = sum(value * value for value in residuals) / (len(x) - k)
    errors = [root(variance * work[i][k + 1 + i]) for i in range(k)]
    return {
        "coefficients": [float(c) for c in coefficients],
        "standardErrors": [float(e) for e in errors],
        "residualDeviation": float(root(variance)),
    }


def main():
    filip = [line.split() for line in open("filip.txt") if line.strip()]
    x = list(range(21))
    powers = [sum(Fraction(value) ** power for power in range(6)) for value in x]
    tenths = [sum((Fraction(value) / 10) ** power for power in range(6)) for value in x]
    # Wampler's disturbance: orthogonal to every polynomial of degree 5 on 0 ... 20.
    half = [759, -2048, 2048, -2048, 2523, -2048, 2048, -2048, 1838, -2048]
    disturbance = half + [2048] + half[::-1]
    cases = {"filip": (10, [Fraction(b) for _, b in filip], [Fraction(a) for a, _ in filip])}
    cases["wampler1"] = (5, x, powers)
    cases["wampler2"] = (5, x, tenths)
    for number, factor in ((3, 1), (4, 100), (5, 10000)):
        cases[f"wampler{number}"] = (5, x, [a + factor * b for a, b in zip(powers, disturbance)])
    out = {}
    for name, (degree, places, values) in cases.items():
        result = fit([Fraction(place) for place in places], values, degree)
        out[name] = {"degree": degree, "x": [float(p) for p in places], "y": [float(v) for v in values], **result}
    print("{\n" + ",\n".join(f" {json.dumps(name)}: {json.dumps(case)}" for name, case in out.items()) + "\n}")


main()
