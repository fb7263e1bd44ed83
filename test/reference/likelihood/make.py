"""Log-likelihoods of noisy positions of free Langevin motions, from SciPy's multivariate normal density.

    python3 make.py > logLikelihoods.json

Second order: y_i - y_0 for i >= 1 is Gaussian with mean f (t - a(t))/G and covariance
    s0^2 + s_i^2 [i = j] + a(t_i) a(t_j) V0 + (process noise), a(t) = (1 - exp(-G t))/G,
for a start velocity of variance V0; the density of the first difference is divided out, since it starts the filter.
First order: y_i - y_0 has mean m t and covariance s0^2 + s_i^2 [i = j] + 2 D min(t_i, t_j).
"""
import json
import numpy
import scipy
from scipy.stats import multivariate_normal

rng = numpy.random.default_rng(20240611)
times = numpy.array([0, 1, 2, 3, 4.5, 5.2, 9, 10, 11, 12, 13, 20.0])
t = times - times[0]
n = len(t)
positions = numpy.cumsum(rng.normal(size=n)) * 0.8
errors = 0.1 + 0.4 * rng.random(n)


def second(friction, noise, force, s):
    G = friction
    a = (1 - numpy.exp(-G * t)) / G
    steps = numpy.diff(positions) / numpy.diff(times)
    V0 = 1e4 * numpy.mean(steps**2)
    T, U = numpy.meshgrid(t[1:], t[1:])
    m = numpy.minimum(T, U)
    e = lambda x: numpy.exp(-G * x)
    process = noise / G**2 * (
        m - (e(T - m) - e(T)) / G - (e(U - m) - e(U)) / G + (e(T + U - 2 * m) - e(T + U)) / (2 * G)
    )
    cov = process + numpy.outer(a[1:], a[1:]) * V0 + s[0] ** 2 + numpy.diag(s[1:] ** 2)
    mean = force * (t[1:] - a[1:]) / G
    y = positions[1:] - positions[0]
    full = multivariate_normal.logpdf(y, mean, cov)
    first = multivariate_normal.logpdf(y[0], mean[0], cov[0, 0])
    return full - first + 0.5 * (n - 2) * numpy.log(2 * numpy.pi)


def firstOrder(diffusion, drift, s):
    cov = 2 * diffusion * numpy.minimum.outer(t[1:], t[1:]) + s[0] ** 2 + numpy.diag(s[1:] ** 2)
    y = positions[1:] - positions[0]
    return multivariate_normal.logpdf(y, drift * t[1:], cov) + 0.5 * (n - 1) * numpy.log(2 * numpy.pi)


same = numpy.full(n, 0.3)
print(json.dumps({
    "made": f"SciPy {scipy.__version__}, numpy {numpy.__version__}, make.py in this folder",
    "times": times.tolist(),
    "positions": positions.tolist(),
    "errors": errors.tolist(),
    "second": {"friction": 0.35, "noise": 0.8, "force": 0.12, "localizationError": 0.3,
               "logLikelihood": second(0.35, 0.8, 0.12, same),
               "logLikelihoodPerPoint": second(0.35, 0.8, 0.12, errors)},
    "first": {"diffusion": 0.4, "drift": 0.07, "localizationError": 0.3,
              "logLikelihood": firstOrder(0.4, 0.07, same),
              "logLikelihoodPerPoint": firstOrder(0.4, 0.07, errors)},
}, indent=2))
