#!/usr/bin/env python3
"""Recomputes levels and a gain spectrum of `wells.toml` with numpy and scipy, which know nothing of
the program, and compares.

    python3 tests/outside/recompute.py [PROGRAM]

PROGRAM is the stepwell binary, `target/release/stepwell` where none is given. Prints one row a
quantity; ends with 1 if one is missed.

Four comparisons, from the inside out:
  matrix    eigenvalues of the Hamiltonian that the program dumps, by LAPACK, against its levels. The
            matrix is that of the finest grid, the levels are extrapolated: they part by the error of
            the grid, up to 1e-4 eV. The mixed valence block at four wave numbers in the plane
            likewise, by shift and invert, against the dispersion.
  levels    the same wells discretised here, on grids of 0.05 and 0.025 nm, extrapolated.
  overlaps  from the vectors of these.
  carriers, spectrum   quasi-Fermi levels, TE and TM gain and spontaneous emission from the levels and
            masses that the program reports and the overlaps found here, the formulas written out
            anew. (Overlaps below 0.01 are not reported, yet emit: they are 1 % of the peak here.)
"""

import json
import subprocess
import sys
import tempfile
import tomllib
from pathlib import Path

import numpy as np
from scipy.constants import c, elementary_charge, fine_structure, hbar, k, m_e
from scipy.io import mmread
from scipy.linalg import eigh_tridiagonal
from scipy.optimize import brentq
from scipy.sparse.linalg import eigsh

HERE = Path(__file__).resolve().parent
FILE = HERE / "wells.toml"
EV = elementary_charge
# hbar^2 / 2 m0 in eV nm^2.
UNIT = hbar**2 / (2 * m_e) / EV * 1e18
BANDS = {"electron": ("electron", 1), "heavy": ("heavy_hole", -1), "light": ("light_hole", -1)}

missed = 0


def compare(name, got, want, tolerance):
    """One row; `got` and `want` are numbers or arrays, the largest difference counts."""
    global missed
    got, want = np.atleast_1d(got), np.atleast_1d(want)
    difference = np.inf if got.shape != want.shape else np.max(np.abs(got - want))
    met = bool(difference <= tolerance)
    missed += not met
    print(f"| {name} | {got.size} | {difference:.1e} | {tolerance:.0e} | {'met' if met else 'MISSED'} |")


def program(*words):
    done = subprocess.run([PROGRAM, *map(str, words)], capture_output=True, text=True)
    if done.returncode:
        sys.exit(f"{PROGRAM} {' '.join(map(str, words))}: {done.stderr}")
    return done.stdout


def matrix(path):
    """Diagonal and second diagonal of a Matrix Market file of three diagonals."""
    with open(path) as lines:
        lines = [line.split() for line in lines if not line.startswith("%")]
    size = int(lines[0][0])
    diagonal, second = np.zeros(size), np.zeros(size - 1)
    for row, column, value in lines[1:]:
        row, column, value = int(row) - 1, int(column) - 1, float(value)
        assert row - column in (0, 1), "three diagonals"
        (diagonal if row == column else second)[column] = value
    return diagonal, second


def layers(band):
    """Thickness (nm), edge (eV, counted upwards from the band), mass along growth of every layer."""
    file = tomllib.loads(FILE.read_text())
    rows = []
    for layer in file["layers"]:
        own = file["materials"][layer["material"]]["numbers"]
        g1, g2, _ = own["luttinger"]
        edge, mass = {
            "electron": (own["valence_edge_ev"] + own["gap_ev"], own["electron_mass"]),
            "heavy": (-own["valence_edge_ev"], 1 / (g1 - 2 * g2)),
            "light": (-own["valence_edge_ev"], 1 / (g1 + 2 * g2)),
        }[band]
        rows.append((layer["thickness_nm"], edge, mass))
    return rows


def discretised(band, step_nm, count):
    """The lowest levels on a grid of our own, and their vectors with sum of w phi^2 = 1."""
    parts = [(round(nm / step_nm), edge, mass) for nm, edge, mass in layers(band)]
    link = np.concatenate([np.full(n, UNIT / mass / step_nm) for n, _, mass in parts])
    edge = np.concatenate([np.full(n, e) for n, e, _ in parts])
    diagonal = (link[:-1] + link[1:]) / step_nm + 0.5 * (edge[:-1] + edge[1:])
    second = -link[1:-1] / step_nm
    return eigh_tridiagonal(diagonal, second, select="i", select_range=(0, count - 1))


def levels_and_matrices(report):
    vectors = {}
    for band, (key, sign) in BANDS.items():
        reported = np.array([level["energy_ev"] for level in report[key]])
        with tempfile.TemporaryDirectory() as folder:
            path = Path(folder) / "dump.mtx"
            program("levels", FILE, "--quiet", "--matrix", path, "--matrix-of", band)
            diagonal, second = matrix(path)
        eigenvalues = sign * eigh_tridiagonal(
            sign * diagonal, sign * second, eigvals_only=True, select="i", select_range=(0, len(reported) - 1)
        )
        compare(f"matrix, {key}, eV", reported, eigenvalues, 2e-4)
        coarse, _ = discretised(band, 0.05, len(reported))
        fine, vectors[band] = discretised(band, 0.025, len(reported))
        compare(f"levels, {key}, eV", reported, sign * (fine + (fine - coarse) / 3), 2e-6)
    return vectors


def valence_matrices():
    """Both blocks that the program dumps, by ARPACK, against the dispersion it reports."""
    report = json.loads(program("levels", FILE, "--json", "--quiet", "--bands", "mixed"))
    top = max(layer["heavy_hole_edge_ev"] for layer in report["layers"])
    for wave_number in (0.0, 0.1, 0.3, 0.5):
        rows = [row for row in report["dispersion"] if abs(row["k_per_nm"] - wave_number) < 1e-9]
        reported = np.sort(rows[0]["energy_ev"])[::-1]
        values = []
        for block in ("valence", "valence-mirror"):
            with tempfile.TemporaryDirectory() as folder:
                path = Path(folder) / "dump.mtx"
                program("levels", FILE, "--quiet", "--bands", "mixed", "--matrix", path,
                        "--matrix-of", block, "--at-k", wave_number)
                dump = mmread(path).tocsc()
            # A shift above every state: the nearest to it are the highest. The stack is not its own
            # mirror image, so that half of the states are those of each block.
            values.extend(eigsh(dump, k=len(reported) // 2, sigma=top + 0.01, return_eigenvectors=False))
        # The error of a grid grows with the wave number.
        allowed = 3e-4 if wave_number < 0.4 else 1e-3
        compare(f"matrices, valence at {wave_number} per nm, eV", reported, np.sort(values)[::-1], allowed)


def overlaps(report, vectors):
    for letters, band in (("hh", "heavy"), ("lh", "light")):
        table = (vectors["electron"].T @ vectors[band]) ** 2
        pairs = [t for t in report["transitions"] if t["hole"].startswith(letters)]
        got = {(t["electron"], t["hole"]): t["overlap"] for t in pairs}
        # Neighbours within 1e-4 eV are one choice inside their span: only sums over them compare.
        energies = np.array([level["energy_ev"] for level in report[BANDS[band][0]]])
        groups = np.split(np.arange(len(energies)), np.where(-np.diff(energies) > 1e-4)[0] + 1)
        ours, theirs = [], []
        for electron in range(table.shape[0]):
            for group in groups:
                ours.append(sum(got.get((electron + 1, f"{letters}{at + 1}"), 0.0) for at in group))
                # What lies below 0.01 is not reported.
                theirs.append(sum(v for v in table[electron, group] if v > 0.01))
        compare(f"overlaps, {letters}", ours, theirs, 2e-3)


def carriers(report, run, temperature_k):
    kt = k * temperature_k / EV
    total_nm = report["wells"]["thickness_nm"]
    sheet = run["density_cm3"] * total_nm * 1e-7

    def density(levels, fermi, sign):
        # m kT / (pi hbar^2) ln(1 + exp(...)), per cm^2; 1e14 from nm^2.
        return sum(
            level["in_plane_mass"] * kt / (2 * np.pi * UNIT)
            * np.logaddexp(0, sign * (fermi - level["energy_ev"]) / kt) * 1e14
            for level in levels
        )

    holes = report["heavy_hole"] + report["light_hole"]
    lowering = 1e-3 * run["shrinkage_mev"]
    electron = brentq(lambda f: density(report["electron"], f, 1) - sheet, -2, 3, xtol=1e-12)
    hole = brentq(lambda f: density(holes, f, -1) - sheet, -3, 2, xtol=1e-12)
    compare("carriers, electron quasi-Fermi level, eV", run["fermi_electron_ev"], electron - lowering, 1e-6)
    compare("carriers, hole quasi-Fermi level, eV", run["fermi_hole_ev"], hole, 1e-6)


def spectrum(report, document, run, vectors):
    file = tomllib.loads(FILE.read_text())
    kane = file["materials"]["well"]["numbers"]["kane_energy_ev"]
    kt = k * document["temperature_k"] / EV
    index, total_nm = document["refractive_index"], report["wells"]["thickness_nm"]
    scale = hbar / EV / (file["model"]["intraband_fs"] * 1e-15) / np.arccosh(2)
    lowering = 1e-3 * run["shrinkage_mev"]
    photon = np.array(run["photon_ev"])
    deepest = {
        "e": min(layer["conduction_edge_ev"] for layer in report["layers"]),
        "hh": max(layer["heavy_hole_edge_ev"] for layer in report["layers"]),
        "lh": max(layer["light_hole_edge_ev"] for layer in report["layers"]),
    }
    occupied = lambda x: 1 / (1 + np.exp(x))
    te, tm = np.zeros_like(photon), np.zeros_like(photon)
    emission = np.zeros_like(photon)
    pairs = [
        (upper, e, kind, lower, v)
        for e, upper in enumerate(report["electron"])
        for kind, key in (("hh", "heavy_hole"), ("lh", "light_hole"))
        for v, lower in enumerate(report[key])
    ]
    for upper, e, kind, lower, v in pairs:
        overlap = (vectors["electron"][:, e] @ vectors["heavy" if kind == "hh" else "light"][:, v]) ** 2
        me, mh = upper["in_plane_mass"], lower["in_plane_mass"]
        reduced = me * mh / (me + mh)
        edge = upper["energy_ev"] - lowering - lower["energy_ev"]
        kinetic = np.maximum(photon - edge, 0)
        confined = max(upper["energy_ev"] - deepest["e"], 0) + max(deepest[kind] - lower["energy_ev"], 0)
        cosine2 = confined / (confined + kinetic)
        if kind == "hh":
            factors = 0.75 * (1 + cosine2), 1.5 * (1 - cosine2)
        else:
            factors = 1.25 - 0.75 * cosine2, 0.5 * (1 + 3 * cosine2)
        step = 2 / np.pi * np.arctan(np.exp((photon - edge) / scale))
        strength = (
            2 / 3 * np.pi * fine_structure * kane / photon * reduced / (index * total_nm * 1e-7)
            * overlap * step
        )
        electron = upper["energy_ev"] - lowering + reduced / me * (photon - edge)
        hole = electron - photon
        fc = occupied((electron - run["fermi_electron_ev"]) / kt)
        fv = occupied((hole - run["fermi_hole_ev"]) / kt)
        te += strength * factors[0] * (fc - fv)
        tm += strength * factors[1] * (fc - fv)
        emission += strength * (2 * factors[0] + factors[1]) / 3 * fc * (1 - fv)
    # Optical modes times their speed, per eV, cm^2 and s.
    emission *= (index * photon) ** 2 / (np.pi**2 * (hbar / EV) ** 3 * (100 * c) ** 2)
    for name, key, want in (
        ("TE gain", "te_gain_cm", te),
        ("TM gain", "tm_gain_cm", tm),
        ("spontaneous emission", "spontaneous_per_ev_cm3_s", emission),
    ):
        got = np.array(run[key])
        peak = np.max(got)
        compare(f"spectrum, {name}, of the peak", got / peak, want / peak, 3e-4)


def main():
    report = json.loads(program("levels", FILE, "--json", "--quiet"))
    document = json.loads(program("spectrum", FILE, "--json", "--quiet"))
    print("| quantity | numbers | largest difference | allowed | |")
    print("|---|---|---|---|---|")
    vectors = levels_and_matrices(report)
    valence_matrices()
    overlaps(report, vectors)
    run = document["runs"][0]
    carriers(report, run, document["temperature_k"])
    spectrum(report, document, run, vectors)
    return 1 if missed else 0


PROGRAM = sys.argv[1] if len(sys.argv) > 1 else str(HERE.parents[1] / "target/release/stepwell")

if __name__ == "__main__":
    sys.exit(main())
