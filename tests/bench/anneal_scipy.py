#!/usr/bin/env python3
"""A ten-qubit closed anneal by SciPy: two prebuilt sparse matrices, DOP853. Prints seconds and the
ground population, to be held against tarn on tests/bench/anneal.tarn."""
import sys
import time

import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.sparse import csr_matrix, identity, kron

N = 10
GHZ = 2 * np.pi


def on(site, matrix):
    result = identity(1, format="csr")
    for k in range(N):
        result = kron(result, matrix if k == site else identity(2), format="csr")
    return result


def main():
    rtol = float(sys.argv[1]) if len(sys.argv) > 1 else 1e-8
    x, z = csr_matrix([[0, 1], [1, 0]]), csr_matrix([[1, 0], [0, -1]])
    drive = sum(on(k, x) for k in range(N)) * (-6 * GHZ / 2)
    problem = sum(on(k, z) @ on((k + 1) % N, z) for k in range(N)) * (-6 * GHZ / 2)
    problem = problem + sum((0.05 + 0.02 * k) * on(k, z) for k in range(N)) * (6 * GHZ / 2)
    ta = 20.0
    psi = np.full(2**N, 2 ** (-N / 2), complex)
    start = time.perf_counter()
    sol = solve_ivp(lambda t, y: -1j * ((1 - t / ta) * (drive @ y) + (t / ta) * (problem @ y)), (0, ta), psi,
                    method="DOP853", rtol=rtol, atol=rtol / 100)
    taken = time.perf_counter() - start
    diagonal = problem.diagonal().real
    p = abs(sol.y[np.argmin(diagonal), -1]) ** 2
    print(f"scipy {scipy.__version__}: {taken:.4f} s, {sol.nfev} evaluations, population {p:.12f}")


main()
