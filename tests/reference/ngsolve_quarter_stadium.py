"""Yardstick for directly computed levels: NGSolve and ARPACK on the quarter stadium, R = a = 1, Dirichlet walls.

A general-purpose finite-element library in its usual way: triangles of uniform size and order, curved at the arc, graded
nowhere; K - s M factorised at a few shifts s (static condensation of the inner functions, sparse Cholesky), and ARPACK (scipy)
for the levels around each. Printed per run: unknowns, levels, time per level (everything: mesh, assembly, factorisation,
Lanczos), and how far the levels are from those of a reference list (csv with a column k) in the median and at most; where that
list does not reach, from those of the finest run of the same window.

    python3 ngsolve_quarter_stadium.py REFERENCE.csv [--window low] [--window high] [--write]

`low` is k < 40, `high` 75 <= k < 80, both if none is named. `--write` writes the list of a second-order mesh of about 2800
unknowns, as coarse codes make it, to data/levels/second-order-quarter-stadium.csv, and the finest runs of both windows to
data/reference/quarter_stadium.csv; the error of a level is the largest difference from the run before among it and its ten
neighbours, since one difference alone can be small by chance. One thread. Versions: ngsolve 6.2.2608, netgen-mesher 6.2.2608,
scipy 1.17.1, numpy 2.4.6.
"""

import os

for variable in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[variable] = "1"

import argparse
import csv
import dataclasses
import importlib.metadata
import pathlib
import time

import netgen.meshing
import ngsolve
import numpy as np
from netgen.occ import OCCGeometry, WorkPlane
from scipy.sparse import linalg

FOLDER = pathlib.Path(__file__).resolve().parents[2]
AREA, PERIMETER = 1 + np.pi / 4, 4 + np.pi / 2
# ARPACK is asked for this many levels more than the smooth count expects on the wider side of a shift.
MARGIN = 12


@dataclasses.dataclass
class Run:
    size: float  # of the triangles
    order: int
    shifts: int  # number of factorisations
    curve: int = 12  # order of the curved elements


# Chosen by trial among orders 8 to 14 and one to ten shifts: the fastest whose largest error in the window is about 1e-5, 4e-8
# and 1e-10, and a finer one.
RUNS = {
    "low": [Run(0.15, 8, 2), Run(0.24, 14, 2), Run(0.155, 12, 2), Run(0.15, 14, 2)],
    "high": [Run(0.105, 10, 1), Run(0.105, 12, 1), Run(0.083, 12, 1), Run(0.10, 14, 1)],
}
WINDOWS = {"low": (0.0, 40.0), "high": (75.0, 80.0)}
SECOND_ORDER = Run(0.053, 2, 2, 2)
SECOND_ORDER_FILE = "data/levels/second-order-quarter-stadium.csv"
REFERENCE_FILE = "data/reference/quarter_stadium.csv"
NEIGHBOURS = 5  # on either side of a level
REPETITIONS = 3  # the fastest of them is printed


def weyl(k):
    """Smooth count: corners 3/16, arc 1/24."""
    return AREA * k**2 / (4 * np.pi) - PERIMETER * k / (4 * np.pi) + 3 / 16 + 1 / 24


def quarter_stadium():
    return WorkPlane().MoveTo(0, 0).Line(2).Rotate(90).Arc(1, 90).Line(1).Rotate(90).Line(1).Close().Face()


def levels(run, window):
    """All levels in a window, and the number of unknowns."""
    mesh = ngsolve.Mesh(OCCGeometry(quarter_stadium(), dim=2).GenerateMesh(maxh=run.size))
    mesh.Curve(run.curve)
    space = ngsolve.H1(mesh, order=run.order, dirichlet=".*")
    u, v = space.TnT()
    mass = ngsolve.BilinearForm(u * v * ngsolve.dx, symmetric=True).Assemble()
    low, high = window[0] ** 2, window[1] ** 2
    # Each shift is responsible for an interval of energies that holds about as many levels as the others do.
    edges = np.linspace(low, high, run.shifts + 1)
    found = []
    for start, end in zip(edges[:-1], edges[1:]):
        found += levels_between(space, mass, start, end)
    return np.sqrt(np.sort(found)), sum(space.FreeDofs())


def levels_between(space, mass, start, end):
    u, v = space.TnT()
    shift = 0.5 * (start + end)
    form = ngsolve.BilinearForm(space, symmetric=True, condense=True)
    form += (ngsolve.grad(u) * ngsolve.grad(v) - shift * u * v) * ngsolve.dx
    form.Assemble()
    inverse = form.mat.Inverse(space.FreeDofs(True), inverse="sparsecholesky")
    extension = ngsolve.IdentityMatrix(space.ndof) + form.harmonic_extension
    solve = extension @ inverse @ (ngsolve.IdentityMatrix(space.ndof) + form.harmonic_extension_trans) + form.inner_solve
    given, image = form.mat.CreateColVector(), form.mat.CreateColVector()
    free = np.array(space.FreeDofs())

    def applied(matrix):
        def apply(x):
            given.FV().NumPy()[:] = np.where(free, x, 0.0)
            image.data = matrix * given
            return np.where(free, image.FV().NumPy(), 0.0)

        return linalg.LinearOperator((space.ndof, space.ndof), matvec=apply, dtype=float)

    count = int(weyl(np.sqrt(end)) - weyl(np.sqrt(start))) + MARGIN
    start_vector = np.where(free, np.random.default_rng(1).normal(size=space.ndof), 0.0)
    energies = linalg.eigsh(
        applied(ngsolve.IdentityMatrix(space.ndof)),  # not used by shift-invert
        count,
        applied(mass.mat),
        sigma=shift,
        OPinv=applied(solve),
        v0=start_vector,
        tol=1e-13,
        return_eigenvectors=False,
    )
    reach = np.abs(energies - shift).max()
    assert reach > end - shift, "too few levels were asked for"
    return [energy for energy in energies if start <= energy < end]


def read(path, window):
    """Levels of a list in a window; nothing if the list ends below it."""
    with open(path, encoding="utf-8") as lines:
        listed = [float(row["k"]) for row in csv.DictReader(line for line in lines if not line.startswith("#"))]
    if max(listed) < window[1]:
        return None
    return np.array([k for k in listed if window[0] <= k < window[1]])


def errors(found, reference, window):
    """Distances: n-th from n-th level, or from the nearest one where the window does not begin at 0 and the numbers differ."""
    if window[0] == 0.0 or len(found) == len(reference):
        common = min(len(found), len(reference))
        return np.abs(found[:common] - reference[:common])
    return np.abs(found[:, None] - reference[None, :]).min(axis=1)


def timed(run, window):
    times = []
    for _ in range(REPETITIONS):
        start = time.perf_counter()
        found, unknowns = levels(run, window)
        times.append(time.perf_counter() - start)
    return found, unknowns, min(times)


def report(name, path):
    window = WINDOWS[name]
    runs = RUNS[name] + ([SECOND_ORDER] if name == "low" else [])
    results = [(run, *timed(run, window)) for run in runs]
    reference = read(path, window)
    source = f"of {path.name}"
    if reference is None:
        reference, source = results[len(RUNS[name]) - 1][1], "of the finest run"
    print(f"{window[0]:g} < k < {window[1]:g}: {len(reference)} levels {source}; load {os.getloadavg()[0]:.1f}")
    print("order  size   shifts  unknowns  levels  seconds  ms per level  median error  largest error")
    for run, found, unknowns, seconds in results:
        off = errors(found, reference, window)
        print(
            f"{run.order:5}  {run.size:5}  {run.shifts:6}  {unknowns:8}  {len(found):6}  {seconds:7.2f}  "
            f"{1e3 * seconds / len(found):12.2f}  {np.median(off):12.1e}  {off.max():13.1e}"
        )
    return results, reference


def write_reference(finest):
    """`finest`: by window the lists of the two finest runs, the finest one first."""
    with open(FOLDER / REFERENCE_FILE, "w", encoding="utf-8") as out:
        out.write(
            "# quarter stadium, radius 1, half straight part 1, all walls Dirichlet; k below 40 and from 75 to 80; error = "
            "largest difference from a coarser run among a level and ten neighbours\n"
            f"# tests/reference/ngsolve_quarter_stadium.py, {versions()}\n"
        )
        out.write("k,error\n")
        for fine, coarse in finest:
            differences = np.abs(fine - coarse)
            for n, k in enumerate(fine):
                error = differences[max(n - NEIGHBOURS, 0) : n + NEIGHBOURS + 1].max()
                out.write(f"{k:.15g},{error:.1e}\n")
    print("written:", REFERENCE_FILE)


def write(found, unknowns, reference):
    off = errors(found, reference, WINDOWS["low"])
    path = FOLDER / SECOND_ORDER_FILE
    path.parent.mkdir(exist_ok=True)
    with open(path, "w", encoding="utf-8") as out:
        out.write(
            "# quarter stadium, radius 1, half straight part 1, all walls Dirichlet: what a coarse finite-element mesh finds "
            "below k = 40\n"
            f"# triangles of second order, {unknowns} unknowns; the n-th level is off by up to {off.max():.2g}, so that only "
            f"{len(found)} of {len(reference)} levels lie below 40\n"
            f"# tests/reference/ngsolve_quarter_stadium.py, {versions()}\n"
        )
        out.write("n,k\n")
        for n, k in enumerate(found, 1):
            out.write(f"{n},{k:.8g}\n")
    print("written:", SECOND_ORDER_FILE)


def versions():
    return ", ".join(f"{name} {importlib.metadata.version(name)}" for name in ("ngsolve", "netgen-mesher", "scipy", "numpy"))


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("reference", type=pathlib.Path)
    parser.add_argument("--window", action="append", choices=list(WINDOWS))
    parser.add_argument("--write", action="store_true")
    arguments = parser.parse_args()
    print(versions(), "one thread")
    finest = []
    for name in arguments.window or WINDOWS:
        results, reference = report(name, arguments.reference)
        last = len(RUNS[name]) - 1
        finest.append((results[last][1], results[last - 1][1]))
        if name == "low" and arguments.write:
            write(results[-1][1], results[-1][2], reference)
    if arguments.write and len(finest) == len(WINDOWS):
        write_reference(finest)


if __name__ == "__main__":
    main()
