#!/usr/bin/env python3
"""The kernels against numpy, LAPACK and ARPACK on the same problems, by turns in one run.

    python3 benches/against.py [PAIRS]

One thread. Every row is the median, over PAIRS turns (15), of the library's time over the program's;
the results of both are compared before they are timed.
"""

import json
import os
import subprocess
import sys
import time

os.environ.update(OPENBLAS_NUM_THREADS="1", OMP_NUM_THREADS="1", MKL_NUM_THREADS="1")

import numpy as np
from scipy.linalg import eigh_tridiagonal, lapack
from scipy.sparse.linalg import LinearOperator, eigsh

PAIRS = int(sys.argv[1]) if len(sys.argv) > 1 else 15


class Program:
    """The program's side, asked for one problem at a time."""

    def __init__(self):
        words = ["cargo", "bench", "--quiet", "--bench", "against", "--", "serve"]
        self.process = subprocess.Popen(words, stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)

    def ask(self, *words):
        self.process.stdin.write(" ".join(map(str, words)) + "\n")
        self.process.stdin.flush()
        return json.loads(self.process.stdout.readline())


def row(name, program, question, library, check):
    """Compares the results, then times both by turns."""
    check(program.ask(*question, 1), library())
    ratios, ours, theirs = [], [], []
    for _ in range(PAIRS):
        start = time.perf_counter()
        library()
        theirs.append(time.perf_counter() - start)
        ours.append(program.ask(*question, 5)["seconds"])
        ratios.append(theirs[-1] / ours[-1])
    low, middle, high = np.quantile(ratios, [0.1, 0.5, 0.9])
    print(f"| {name} | {1e3 * np.median(theirs):.3f} | {1e3 * np.median(ours):.4f} | "
          f"{middle:.1f} | {low:.1f} to {high:.1f} |", flush=True)


def near(name, got, want, tolerance):
    difference = np.max(np.abs(np.asarray(got) - np.asarray(want)))
    if not difference < tolerance:
        sys.exit(f"{name}: results part by {difference}")


def single_band(program):
    for nodes in (599, 2399):
        problem = program.ask("matrix", "single", nodes)
        diagonal, second = np.array(problem["diagonal"]), np.array(problem["second"])

        def library():
            return eigh_tridiagonal(diagonal, second, select="v", select_range=(-1, problem["below"]),
                                    lapack_driver="stebz", tol=1e-9)

        row(f"single band, {nodes} nodes, LAPACK stebz with vectors", program,
            ("solve", "single", nodes, "constant"), library,
            lambda ours, theirs: near("levels", ours["energies"], theirs[0], 2e-9))


def valence(program):
    problem = program.ask("matrix", "valence")
    size, states, width = problem["size"], problem["states"], 5
    bands = []
    for entries in problem["matrices"]:
        # Lower band storage: band[row - column, column].
        band = np.zeros((width + 1, size))
        for row_, column, value in entries:
            band[column - row_, row_] = value
        bands.append(np.asfortranarray(band))

    def library():
        energies, start = [], None
        shift = problem["floor"]
        for band in bands:
            shifted = band.copy(order="F")
            shifted[0] -= shift
            factor, info = lapack.dpbtrf(shifted, lower=1)
            if info:
                sys.exit("the shift lies above the lowest state")
            solve = LinearOperator((size, size), dtype=float,
                                   matvec=lambda x: lapack.dpbtrs(factor, x, lower=1)[0])
            # The largest 1/(E - shift): the mode of shift-invert, warm from the sum of the states before.
            values, vectors = eigsh(solve, k=states, which="LM", v0=start, tol=1e-7)
            energies.append(np.sort(shift + 1 / values))
            start = vectors.sum(axis=1)
        return energies

    def per_wave_number():
        return library()

    check = lambda ours, theirs: near("valence states", ours["energies"], theirs, 1e-6)
    check(program.ask("solve", "valence", 1), per_wave_number())
    ratios, ours, theirs = [], [], []
    for _ in range(max(3, PAIRS // 3)):
        start = time.perf_counter()
        per_wave_number()
        theirs.append((time.perf_counter() - start) / len(bands))
        ours.append(program.ask("solve", "valence", 1)["seconds"])
        ratios.append(theirs[-1] / ours[-1])
    low, middle, high = np.quantile(ratios, [0.1, 0.5, 0.9])
    print(f"| valence block, 279 nodes, per wave number, ARPACK over banded Cholesky, warm | "
          f"{1e3 * np.median(theirs):.3f} | {1e3 * np.median(ours):.4f} | {middle:.1f} | "
          f"{low:.1f} to {high:.1f} |", flush=True)


def spectrum(program):
    problem = program.ask("matrix", "spectrum")
    electron, hole, te, tm = np.array(problem["samples"]).T
    electron = electron - problem["lowering"]
    low, step, count = problem["photons"]
    photon = low + step * np.arange(count)
    kt = problem["thermal"]
    weights = np.stack([te, tm], axis=1)
    for shape, scale in zip(("sech", "lorentzian"), problem["scale"]):
        def line(x):
            if shape == "sech":
                return 1 / (np.pi * scale * np.cosh(x / scale))
            return 1 / (np.pi * scale * (1 + (x / scale) ** 2))

        def whole():
            x = photon[:, None] - (electron - hole)
            fc = 1 / (1 + np.exp((electron + 0.5 * x - problem["fermi_electron"]) / kt))
            fv = 1 / (1 + np.exp((hole - 0.5 * x - problem["fermi_hole"]) / kt))
            return (line(x) * fc * (1 - fv)) @ weights

        def line_only():
            return line(photon[:, None] - (electron - hole)) @ weights

        def check(ours, emits):
            # Gain from emission by the factor of the splitting: the program's own constants cancel.
            above = (photon - problem["fermi_electron"] + problem["fermi_hole"]) / kt
            gain = -np.expm1(above) * emits[:, 0] / photon
            got = np.array(ours["te_gain"])
            near(f"{shape} gain", got / got.max(), gain / gain.max(), 1e-9)

        row(f"spectrum sum, {shape}, numpy, occupations off the line too", program,
            ("solve", "spectrum", shape), whole, check)
        # Less than the program does: the occupations are those of the samples, once for all.
        row(f"spectrum sum, {shape}, numpy, the line alone", program,
            ("solve", "spectrum", shape), line_only, lambda ours, theirs: None)


def main():
    program = Program()
    print("| problem | library, ms | program, ms | ratio | from 10 % to 90 % of the turns |")
    print("|---|---|---|---|---|")
    single_band(program)
    valence(program)
    spectrum(program)


if __name__ == "__main__":
    main()
