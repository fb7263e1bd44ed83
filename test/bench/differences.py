"""The estimator `differences` at second order, written straight down with NumPy and SciPy: what `npm run bench` measures
against. Scalar friction and noise, splines of 8 functions per axis, 200 replicates.

    python3 differences.py tracks.csv [replicates]

Prints the seconds of each part and friction in the middle with its standard error, as JSON. Reads the whole table at
once, needs tracks without gaps in row order, and takes the smoothing strengths by the same cross-validation.
"""

import json
import resource
import sys
import time

import numpy as np
from scipy.linalg import cho_factor, cho_solve, cholesky, solve_triangular
from scipy.sparse import csr_matrix, hstack

FUNCTIONS = 8
BLOCKS = 100
FOLDS = 6
STRENGTHS = [1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 1e-1, 1, 1e1, 1e2, 1e4]


def basis(places, low, high):
    """Cubic B-splines on a uniform grid: sparse design matrix, and its derivatives along the axes."""
    n, d = places.shape
    cells = FUNCTIONS - 3
    parts = []
    for axis in range(d):
        u = np.clip((places[:, axis] - low[axis]) / (high[axis] - low[axis]) * cells, 0, cells)
        cell = np.minimum(u.astype(int), cells - 1)
        t = u - cell
        r = 1 - t
        values = np.stack([r**3, 3 * t**3 - 6 * t**2 + 4, 3 * r**3 - 6 * r**2 + 4, t**3], 1) / 6
        slopes = np.stack([-(r**2) / 2, 1.5 * t**2 - 2 * t, 2 * r - 1.5 * r**2, t**2 / 2], 1)
        slopes *= cells / (high[axis] - low[axis])
        parts.append((cell[:, None] + np.arange(4), values, slopes))
    (i, a, da), (j, b, db) = parts
    columns = (i[:, :, None] * FUNCTIONS + j[:, None, :]).reshape(n, -1)
    rows = np.arange(n + 1) * 16

    def sparse(first, second):
        data = (first[:, :, None] * second[:, None, :]).reshape(-1)
        return csr_matrix((data, columns.reshape(-1), rows), shape=(n, FUNCTIONS**2))

    return sparse(a, b), [sparse(da, b), sparse(a, db)]


def roughness():
    own = np.diff(np.eye(FUNCTIONS), 2, axis=0)
    own = own.T @ own
    both = np.kron(own, np.eye(FUNCTIONS)) + np.kron(np.eye(FUNCTIONS), own)
    return both * len(both) / np.trace(both)


def penalty(groups, strengths, scales, p):
    out = np.zeros((p, p))
    k = FUNCTIONS**2
    for offsets, strength, scale in zip(groups, strengths, scales):
        for offset in offsets:
            out[offset : offset + k, offset : offset + k] += strength * scale * roughness()
    return out


def solve(matrices, vectors, gram, groups, strengths):
    """Penalised two-stage least squares; strengths by cross-validation over folds of blocks unless given."""
    p = len(gram)
    white = cholesky(gram + 1e-9 * np.diag(np.maximum(np.diag(gram), np.mean(np.diag(gram)))), lower=True)
    fold = [slice(start, None, FOLDS) for start in range(FOLDS)]
    a = [solve_triangular(white, matrices[part].sum(0), lower=True) for part in fold]
    c = [solve_triangular(white, vectors[part].sum(0), lower=True) for part in fold]
    total, right = sum(a), sum(c)
    information = total.T @ total
    k = FUNCTIONS**2
    scales = [np.mean([np.diag(information)[o : o + k].mean() for o in offsets]) for offsets in groups]
    ridge = 1e-10 * np.diag(np.maximum(np.diag(information), np.mean(np.diag(information))))
    if strengths is None:
        strengths = [1e-2] * len(groups)
        training = [((total - x).T @ (total - x), (total - x).T @ (right - y), x, y) for x, y in zip(a, c)]
        share = ((FOLDS - 1) / FOLDS) ** 2
        for _ in range(2 if len(groups) > 1 else 1):
            for g in range(len(groups)):
                scores = []
                for trial in STRENGTHS:
                    strengths[g] = trial
                    extra = share * (penalty(groups, strengths, scales, p) + ridge)
                    scores.append(
                        sum(
                            np.sum((y - x @ cho_solve(cho_factor(normal + extra), side)) ** 2)
                            for normal, side, x, y in training
                        )
                    )
                strengths[g] = STRENGTHS[int(np.argmin(scores))]
    factor = cho_factor(information + penalty(groups, strengths, scales, p) + ridge)
    parameters = cho_solve(factor, total.T @ right)
    residuals = solve_triangular(white, (vectors - matrices @ parameters).T, lower=True)
    influences = cho_solve(factor, total.T @ residuals).T
    return parameters, influences, strengths


def by_block(left, right, block):
    """Per block: leftᵀ right, dense."""
    edges = np.searchsorted(block, np.arange(BLOCKS + 1))
    return np.stack([(left[s:e].T @ right[s:e]).toarray() for s, e in zip(edges, edges[1:])])


def covariance_ratio(half):
    x = 2 * np.arctanh(np.clip(half, -0.95, 0.95))
    e = np.exp(-x)
    own, following = 2 * (x - 1 + e), (1 - e) ** 2
    with np.errstate(divide="ignore", invalid="ignore"):
        exact = ((1 + e * e) * own - 2 * e * following) / ((1 + e * e) * following - e * (own + e * following))
    return np.where(np.abs(x) < 0.02, 4 + 0.2 * x * x, exact)


def main():
    start = time.perf_counter()
    replicates = int(sys.argv[2]) if len(sys.argv) > 2 else 200
    table = np.loadtxt(sys.argv[1], delimiter=",", skiprows=1)
    loaded = time.perf_counter()
    track, y = table[:, 0], table[:, 2:4]
    dt = np.median(np.diff(table[: min(len(table), 1000), 1]))
    low, high = y.min(0), y.max(0)
    k, d = FUNCTIONS**2, 2
    p = 3 * k
    # Row k with k−2 … k+1 in the same track.
    inside = np.flatnonzero(track[:-3] == track[3:]) + 2
    block = (np.cumsum(np.r_[0, np.diff(track) != 0]) * BLOCKS // len(np.unique(track))).astype(int)[inside]
    design, slopes = basis(y, low, high)
    acceleration = (y[inside + 1] - 2 * y[inside] + y[inside - 1]) / dt**2
    velocity = (y[inside + 1] - y[inside - 1]) / (2 * dt)
    earlier = (y[inside - 1] - y[inside - 2]) / dt
    now, before = design[inside], design[inside - 2]
    empty = csr_matrix(now.shape)
    matrices = np.zeros((BLOCKS, p, p))
    vectors = np.zeros((BLOCKS, p))
    gram = np.zeros((p, p))
    regressors = []
    for axis in range(d):
        force = [now if other == axis else empty for other in range(d)]
        lagged = [before if other == axis else empty for other in range(d)]
        x = hstack([*force, now.multiply(-velocity[:, [axis]])]).tocsr()
        z = hstack([*lagged, before.multiply(-earlier[:, [axis]])]).tocsr()
        matrices += by_block(z, x, block)
        vectors += by_block(z, csr_matrix(acceleration[:, [axis]]), block)[:, :, 0]
        gram += (z.T @ z).toarray()
        regressors.append(x)
    products = by_block(before, now, block)
    sums = by_block(before, csr_matrix(np.ones((len(inside), 1))), block)[:, :, 0]
    collected = time.perf_counter()

    groups, strengths = [[0, k], [2 * k]], None
    middle = np.flatnonzero((np.diff(inside)[:-1] == 1) & (np.diff(inside)[1:] == 1)) + 1
    variance = np.zeros(d)
    for round_ in range(9):
        shifted, moved = matrices.copy(), vectors.copy()
        shifted[:, 2 * k :, 2 * k :] += variance.sum() / (2 * dt * dt) * products
        moved[:, 2 * k :] += variance.sum() / dt**3 * sums
        parameters, influences, strengths = solve(shifted, moved, gram, groups, strengths if round_ > 1 else None)
        residuals = np.stack([acceleration[:, a] - regressors[a] @ parameters for a in range(d)], 1)
        half = (now @ parameters[2 * k :]) * dt / 2
        ratio = covariance_ratio(half[middle])
        last, variance = variance, np.zeros(d)
        for axis in range(d):
            e = residuals[:, axis]
            upper = dt**4 * e[middle] * (e[middle] - ratio * (e[middle - 1] + e[middle + 1]) / 2)
            bend = 2 + (slopes[axis][inside[middle]] @ parameters[axis * k : axis * k + k]) * dt * dt
            lower = 2 + 2 * half[middle] ** 2 + bend**2 + 2 * bend * ratio
            variance[axis] = upper.sum() / lower.sum()
        if np.all(np.abs(variance - last) < 1e-6 * np.abs(upper).sum() / lower.sum()):
            break
    settled = time.perf_counter()

    wide = middle[np.isin(middle - 1, middle) & np.isin(middle + 1, middle)]
    window = sum(residuals[wide + j] for j in range(-2, 3))
    response = dt * np.mean(residuals[wide] * window, axis=1)
    at = now[wide]
    noise_matrices = by_block(at, at, block[wide])
    noise_vectors = by_block(at, csr_matrix(response[:, None]), block[wide])[:, :, 0]
    noise, noise_influences, _ = solve(noise_matrices, noise_vectors, noise_matrices.sum(0), [[0]], None)
    # How the noise moves with force and friction.
    sensitivity = np.zeros((k, p))
    for axis in range(d):
        sensitivity -= (at.T @ regressors[axis][wide].multiply(dt * window[:, [axis]]).tocsr()).toarray()
    regressed = time.perf_counter()

    generator = np.random.default_rng(1)
    places = np.stack(np.meshgrid(*[np.linspace(l, h, 26)[1:-1] for l, h in zip(low, high)]), -1).reshape(-1, 2)
    grid, _ = basis(places, low, high)
    draws = generator.multinomial(BLOCKS, np.full(BLOCKS, 1 / BLOCKS), replicates) - 1
    moved_noise = noise_influences + np.linalg.solve(noise_matrices.sum(0) + 1e-6 * np.eye(k), sensitivity @ influences.T).T
    friction = grid @ (parameters[2 * k :, None] + (draws @ influences)[:, 2 * k :].T)
    friction = 2 / dt * np.arctanh(np.clip(friction * dt / 2, -0.999, 0.999))
    noises = grid @ (noise[:, None] + (draws @ moved_noise).T)
    centre = len(places) // 2 + 12
    end = time.perf_counter()
    print(
        json.dumps(
            {
                "reading": round(loaded - start, 2),
                "moments": round(collected - loaded, 2),
                "settling": round(settled - collected, 2),
                "noise": round(regressed - settled, 2),
                "resampling": round(end - regressed, 2),
                "total": round(end - start, 2),
                "positions": len(table),
                "peak": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024,
                "processor": time.process_time(),
                "localizationError": np.sqrt(np.maximum(variance, 0)).tolist(),
                "friction": [float(friction[centre].mean()), float(friction[centre].std())],
                "noise_": [float(noises[centre].mean()), float(noises[centre].std())],
            }
        )
    )


main()
