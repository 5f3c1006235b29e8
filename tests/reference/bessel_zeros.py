"""Levels of disk, annulus and circular sectors of outer radius 1, as zeros of Bessel functions.

Writes data/reference/{disk,annulus,sector}_*.csv. Needs numpy 2.4.6, scipy 1.17.1, mpmath 1.4.1.

Roots are bracketed by sign changes of scipy.special functions on a grid much finer than their smallest distance, then
polished by two Newton steps in 30-digit arithmetic (mpmath), so the printed digits are all good. The grid starts at half the
order: J_m, J_m' and their cross products have no positive zero below the order.

With names of tables as arguments (`bessel_zeros.py sector_60_dn`) only these are written.
"""

import fractions
import pathlib
import sys

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
    """Radial levels of angular order `order` (any real number >= 0, of 30 digits if it is no small fraction)."""
    near = float(order)
    if condition == "D":
        return roots(lambda k: special.jv(near, k), lambda k: mpmath.besselj(order, k), 0.5 * near)
    # The level k = 0 of order 0 is not a sign change; the caller adds it.
    return roots(lambda k: special.jvp(near, k), lambda k: mpmath.besselj(order, k, derivative=1), 0.5 * near)


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
    with open(FOLDER / f"{name}.csv", "w", encoding="utf-8") as out:
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


ZERO = (0, 1, mpmath.mpf(0))  # the constant function of Neumann walls


def disk(condition):
    if condition == "D":
        about = "Disk, radius 1, Dirichlet: zeros of J_m below 66"
        return about, integer_orders(lambda m: disk_roots(m, "D"))
    about = "Disk, radius 1, Neumann: zeros of J_m' below 66 and the level k = 0"
    return about, integer_orders(lambda m: disk_roots(m, "N")) + [ZERO]


def annulus(outer, inner):
    rows = integer_orders(lambda m: annulus_roots(m, 0.5, 1.0, outer, inner))
    if outer + inner == "NN":
        rows.append(ZERO)
    return f"Annulus, radii 1 (condition {outer}) and 0.5 (condition {inner}), k below 66", rows


def sector(opening, walls, arc):
    """`opening` is a fraction of pi, or a number of radians; `walls` dd or dn (nn: dd and the zeros of order 0)."""
    shift = mpmath.mpf(1) / 2 if walls == "dn" else 0
    if isinstance(opening, fractions.Fraction):
        half_turns = mpmath.mpf(opening.numerator) / opening.denominator
    else:
        half_turns = opening / mpmath.pi
    orders = [(m - shift) / half_turns for m in range(1, int(TOP * half_turns) + 2)]
    rows = [(float(order), 1, k) for order in orders for k in disk_roots(order, arc)]
    condition = {"D": "Dirichlet", "N": "Neumann"}[arc]
    about = f"Sector of opening {float(half_turns * mpmath.pi):.15g}, radius 1, arc {condition}, radial walls {walls}"
    return about, rows


SECTORS = {
    "60": fractions.Fraction(1, 3),
    "120": fractions.Fraction(2, 3),
    "pi": fractions.Fraction(1),
    "270": fractions.Fraction(3, 2),
    "342": fractions.Fraction(19, 10),
    "two": 2.0,
}
# Sectors of pi/n with like walls, and the half and quarter disk, take their levels from the disk.
SECTOR_WALLS = [
    ("60", ["dn"]),
    ("120", ["dd", "dn"]),
    ("pi", ["dn"]),
    ("270", ["dd", "dn"]),
    ("342", ["dd", "dn"]),
    ("two", ["dd", "dn"]),
]

TABLES = {"disk_d": lambda: disk("D"), "disk_n": lambda: disk("N")}
for conditions in ["DD", "DN", "ND", "NN"]:
    TABLES[f"annulus_{conditions.lower()}"] = lambda conditions=conditions: annulus(*conditions)
for opening, all_walls in SECTOR_WALLS:
    for walls in all_walls:
        for arc, ending in [("D", ""), ("N", "_arc_n")]:
            TABLES[f"sector_{opening}_{walls}{ending}"] = lambda o=opening, w=walls, a=arc: sector(SECTORS[o], w, a)


def main():
    for name in sys.argv[1:] or TABLES:
        write(name, *TABLES[name]())


if __name__ == "__main__":
    main()
