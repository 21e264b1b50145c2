#!/usr/bin/env python3
"""A ten-qubit closed anneal (anneal.tarn) by tarn and by SciPy with two prebuilt sparse matrices.

    anneal_against_scipy.py TARN

Both answers are held against a run of tarn 1e4 times tighter; SciPy's tolerance is the loosest of a
list that is at least as good as tarn's answer. Prints seconds, errors and the ratio, taken in turn.
"""
import csv
import os
import pathlib
import re
import statistics
import subprocess
import sys
import tempfile
import time

import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.sparse import csr_matrix, identity, kron

N = 10
GHZ = 2 * np.pi
TA = 20.0
REPEATS = 5
MODEL = pathlib.Path(__file__).with_name("anneal.tarn").read_text()


def on(site, matrix):
    result = identity(1, format="csr")
    for k in range(N):
        result = kron(result, matrix if k == site else identity(2), format="csr")
    return result


def operators():
    x, z = csr_matrix([[0, 1], [1, 0]]), csr_matrix([[1, 0], [0, -1]])
    drive = sum(on(k, x) for k in range(N)) * (-6 * GHZ / 2)
    problem = sum(on(k, z) @ on((k + 1) % N, z) for k in range(N)) * (-6 * GHZ / 2)
    problem = problem + sum((0.05 + 0.02 * k) * on(k, z) for k in range(N)) * (6 * GHZ / 2)
    return drive, problem


def by_scipy(drive, problem, rtol):
    """Seconds of the solution alone and the population of the lowest basis state."""
    psi = np.full(2**N, 2 ** (-N / 2), complex)
    start = time.perf_counter()
    sol = solve_ivp(lambda t, y: -1j * ((1 - t / TA) * (drive @ y) + (t / TA) * (problem @ y)), (0, TA), psi,
                    method="DOP853", rtol=rtol, atol=rtol / 100)
    taken = time.perf_counter() - start
    return taken, abs(sol.y[np.argmin(problem.diagonal().real), -1]) ** 2


def by_tarn(program, tolerance):
    """Seconds of the points alone, of the whole process, and the population."""
    with tempfile.TemporaryDirectory() as folder:
        model = pathlib.Path(folder, "anneal.tarn")
        model.write_text(MODEL.replace("tolerance 1e-6", f"tolerance {tolerance}"))
        start = time.perf_counter()
        done = subprocess.run([program, "run", model, "--out", pathlib.Path(folder, "r"), "--timings", "--jobs", "1"],
                              capture_output=True, text=True, check=True)
        whole = time.perf_counter() - start
        points = float(re.search(r"points: ([0-9.]+) s", done.stderr + done.stdout).group(1))
        with open(pathlib.Path(folder, "r", "anneal", "results.csv"), newline="") as file:
            return points, whole, float(next(csv.DictReader(file))["success"])


def main():
    if len(sys.argv) != 2:
        sys.exit("usage: anneal_against_scipy.py TARN")
    program = os.path.abspath(sys.argv[1])
    exact = by_tarn(program, 1e-10)[2]
    mine = by_tarn(program, 1e-6)[2]
    drive, problem = operators()
    for rtol in (1e-5, 1e-6, 1e-7, 1e-8, 1e-9, 1e-10):
        theirs = by_scipy(drive, problem, rtol)[1]
        if abs(theirs - exact) <= max(abs(mine - exact), 1e-8):
            break
    rows = []
    for _ in range(REPEATS):
        points, whole, _ = by_tarn(program, 1e-6)
        rows.append((by_scipy(drive, problem, rtol)[0], points, whole))
    slow, points, whole = (statistics.median(column) for column in zip(*rows))
    print(f"SciPy {scipy.__version__}, DOP853 at rtol {rtol:g}: {slow:.3f} s, off by {abs(theirs - exact):.1e}")
    print(f"tarn at tolerance 1e-6: points {points:.3f} s, whole process {whole:.3f} s, off by {abs(mine - exact):.1e}")
    print(f"ratio: {slow / points:.1f} against the points, {slow / whole:.1f} against the whole process")


main()
