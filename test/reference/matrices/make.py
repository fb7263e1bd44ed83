"""Exponentials, logarithms and square roots of small matrices, from scipy.linalg. Run: python3 make.py > values.json"""

import json
import sys

import numpy as np
import scipy
from scipy.linalg import expm, logm, sqrtm

rng = np.random.default_rng(20240917)
exponentials, principals, symmetric = [], [], []
for d in (1, 2, 3):
    for size in (0.01, 1.0, 6.0):
        matrix = size * rng.standard_normal((d, d))
        exponentials.append(dict(d=d, matrix=matrix.ravel().tolist(), exponential=expm(matrix).ravel().tolist()))
    for size in (0.05, 0.6, 1.5):
        generator = size * rng.standard_normal((d, d))
        generator -= np.diag(np.diag(generator)) * 0.5
        matrix = expm(generator)  # has a principal logarithm and root where |Im eigenvalue| < pi
        assert np.max(np.abs(np.imag(np.linalg.eigvals(generator)))) < 3
        principals.append(
            dict(d=d, matrix=matrix.ravel().tolist(), logarithm=np.real(logm(matrix)).ravel().tolist(),
                 root=np.real(sqrtm(matrix)).ravel().tolist())
        )
    half = rng.standard_normal((d, d))
    matrix = (half + half.T) / 2
    symmetric.append(
        dict(d=d, matrix=matrix.ravel().tolist(), eigenvalues=np.linalg.eigvalsh(matrix).tolist(),
             exponential=expm(matrix).ravel().tolist())
    )
json.dump(
    dict(source=f"scipy.linalg {scipy.__version__}, numpy {np.__version__}, python {sys.version.split()[0]}",
         exponentials=exponentials, principals=principals, symmetric=symmetric), sys.stdout, indent=1)
