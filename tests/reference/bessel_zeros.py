"""Levels of disk, annulus and circular sectors of outer radius 1, as zeros of Bessel functions.

Writes data/reference/{disk,annulus,sector}_*.csv. Needs numpy 2.4.6, scipy 1.17.1, mpmath 1.4.1.

Roots are bracketed by sign changes of scipy.special functions on a grid much finer than their smallest distance, then
polished by two Newton steps in 30-digit arithmetic (mpmath), so the printed digits are all good. The grid starts at half the
order: J_m, J_m' and their cross products have no positive zero below the order.
"""

import pathlib

import mpmath
import numpy as np
from scipy import optimize, special

mpmath.mp.dps = 30
TOP = 66.0  # largest k
STEP = 0.02  # grid of the bracketing; neighbouring zeros of one order are at least 2 apart
FOLDER = pathlib.Path(__file__).resolve().parents[2] / "data" / "reference"


def roots(function, exact, start):
    """All roots of `function` in (start, TOP), polished as roots of `exact`."""
    grid = np.arange(max(start, STEP), TOP + STEP, STEP)
    values = function(grid)
    found = []
    for i in np.nonzero(np.sign(values[:-1]) * np.sign(values[1:]) < 0)[0]:
        guess = optimize.brentq(function, grid[i], grid[i + 1], xtol=1e-13)
        # The slope needs few digits: each step gains as many as it has.
        slope = (function(guess + 1e-5) - function(guess - 1e-5)) / 2e-5
        root = mpmath.mpf(guess)
        for _ in range(2):
            root -= exact(root) / slope
        assert abs(root - guess) < 1e-9, (guess, root)
        if root < TOP:
            found.append(root)
    return found


def disk_roots(order, condition):
    """Radial levels of angular order `order` (any real number >= 0)."""
    if condition == "D":
        return roots(lambda k: special.jv(order, k), lambda k: mpmath.besselj(order, k), 0.5 * order)
    # The level k = 0 of order 0 is not a sign change; the caller adds it.
    return roots(
        lambda k: special.jvp(order, k), lambda k: mpmath.besselj(order, k, derivative=1), 0.5 * order
    )


def annulus_roots(order, inner, outer, condition_outer, condition_inner):
    """Radial levels between two circles."""
    j = {"D": special.jv, "N": special.jvp}
    y = {"D": special.yv, "N": special.yvp}
    derivative = {"D": 0, "N": 1}

    def function(k):
        o, i = condition_outer, condition_inner
        cross = j[o](order, k * outer) * y[i](order, k * inner) - y[o](order, k * outer) * j[i](order, k * inner)
        return cross / np.hypot(j[i](order, k * inner), y[i](order, k * inner))

    def exact(k):
        o, i = derivative[condition_outer], derivative[condition_inner]
        j_inner, y_inner = (f(order, k * inner, derivative=i) for f in (mpmath.besselj, mpmath.bessely))
        j_outer, y_outer = (f(order, k * outer, derivative=o) for f in (mpmath.besselj, mpmath.bessely))
        return (j_outer * y_inner - y_outer * j_inner) / mpmath.hypot(j_inner, y_inner)

    return roots(function, exact, 0.5 * order)


def write(name, about, rows):
    """rows: (order, multiplicity, k)."""
    rows = sorted(rows, key=lambda row: row[2])
    with open(FOLDER / name, "w", encoding="utf-8") as out:
        out.write(f"# {about}; tests/reference/bessel_zeros.py, scipy 1.17.1, mpmath 1.4.1\n")
        out.write("order,multiplicity,k\n")
        for order, multiplicity, k in rows:
            out.write(f"{order:.10g},{multiplicity},{mpmath.nstr(k, 15)}\n")
    print(name, len(rows), sum(row[1] for row in rows))


def integer_orders(levels):
    """Rows of a rotationally symmetric domain: orders 0, 1, .. until one has no level below TOP."""
    rows = []
    for order in range(int(TOP) + 2):
        rows += [(order, 1 if order == 0 else 2, k) for k in levels(order)]
    return rows


def main():
    write("disk_d.csv", "Disk, radius 1, Dirichlet: zeros of J_m below 66", integer_orders(lambda m: disk_roots(m, "D")))
    rows = integer_orders(lambda m: disk_roots(m, "N")) + [(0, 1, mpmath.mpf(0))]
    write("disk_n.csv", "Disk, radius 1, Neumann: zeros of J_m' below 66 and the level k = 0", rows)
    for outer, inner in ["DD", "DN", "NN"]:
        rows = integer_orders(lambda m: annulus_roots(m, 0.5, 1.0, outer, inner))
        if outer + inner == "NN":
            rows.append((0, 1, mpmath.mpf(0)))
        write(
            f"annulus_{outer.lower()}{inner.lower()}.csv",
            f"Annulus, radii 1 (condition {outer}) and 0.5 (condition {inner}), k below 66",
            rows,
        )
    for name, beta, shift in [("two_dd", 2.0, 0.0), ("two_dn", 2.0, 0.5), ("pi_dn", np.pi, 0.5)]:
        orders = [(m - shift) * np.pi / beta for m in range(1, int(TOP * beta / np.pi) + 2)]
        rows = [(order, 1, k) for order in orders for k in disk_roots(order, "D")]
        write(f"sector_{name}.csv", f"Sector of opening {beta:.15g}, radius 1, arc Dirichlet, radial walls {name[-2:]}", rows)


if __name__ == "__main__":
    main()
