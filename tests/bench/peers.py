"""Peers in NumPy and SciPy, one thread: normal equations of a bilinear table, a solve, all variances. Prints JSON."""
import json
import time

import numpy as np
import scipy.linalg


def best(work, runs=5):
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def normal_equations(samples=360_000, rows=16, cols=16):
    """The fastest form found: one bincount per pair of corners, over the flat index of the pair."""
    random = np.random.default_rng(1)
    x, y = random.random(samples) * (cols - 1), random.random(samples) * (rows - 1)
    weight, value = random.random(samples), random.random(samples)
    n = rows * cols

    def work():
        c, r = np.minimum(x.astype(np.int64), cols - 2), np.minimum(y.astype(np.int64), rows - 2)
        u, v = x - c, y - r
        first = r * cols + c
        cells = (first, first + 1, first + cols, first + cols + 1)
        shares = ((1 - u) * (1 - v), u * (1 - v), (1 - u) * v, u * v)
        a = np.zeros(n * n)
        b = np.zeros(n)
        for p in range(4):
            weighted = weight * shares[p]
            b += np.bincount(cells[p], weighted * value, n)
            for q in range(p + 1):
                a += np.bincount(cells[p] * n + cells[q], weighted * shares[q], n * n)
        return a, b

    return best(work, 3)


def system(n):
    random = np.random.default_rng(2)
    root = random.standard_normal((n, n))
    return root @ root.T + n * np.eye(n), random.standard_normal(n)


def variances(a):
    factor, _ = scipy.linalg.lapack.dpotrf(a, lower=True)
    inverse, _ = scipy.linalg.lapack.dpotri(factor, lower=True)
    return np.diag(inverse)


out = {"normal": normal_equations()}
for n in (256, 1024):
    a, b = system(n)
    out[f"solve{n}"] = best(lambda: np.linalg.solve(a, b))
    out[f"variances{n}"] = best(lambda: variances(a))
print(json.dumps(out))
