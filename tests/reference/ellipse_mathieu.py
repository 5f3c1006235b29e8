"""Levels of the ellipse with half axes 1 and 0.6, Dirichlet wall, by Mathieu functions, to 15 digits.

x = c cosh(mu) cos(nu), y = c sinh(mu) sin(nu), c = 4/5, wall at mu = artanh(3/5) = log 2. With q = (k c/2)^2 a level is a value
of k at which the angular equation f'' + (a - 2 q cos 2 nu) f = 0 (periodic) and the radial one g'' - (a - 2 q cosh 2 mu) g = 0
(g even in mu for f = ce, odd for f = se, g(log 2) = 0) have the same a (Abramowitz & Stegun, chapter 20; DLMF 28).

1. Every pair (nodes of f, nodes of g) has exactly one level (Klein's oscillation theorem). The pairs are run through in order,
   and the crossing of the two eigenvalues a is bracketed in double precision: Fourier series of f, Legendre polynomials for g.
2. g is the Fourier series of f at imaginary argument, g(mu) = sum A_j cosh(j mu) or sum B_j sinh(j mu). Its zero in k at
   mu = log 2 is found by the secant method with 60 digits (mpmath), which also makes up for the cancellation in the sum.

Checks: a against scipy.special.mathieu_a and mathieu_b for the lowest 40 levels; all k against the Galerkin method of
ellipse_levels.py; a longer series for some levels. Writes data/reference/ellipse_6_mathieu.csv. Needs numpy 2.4.6, scipy
1.17.1, mpmath 1.4.1.
"""

import csv

import mpmath
import numpy as np
from scipy import linalg, optimize, special

from ellipse_levels import FOLDER, radial

mpmath.mp.dps = 60
TOP = 66.0
FOCUS = 0.8
WALL = np.log(2.0)
TERMS = 90  # Fourier coefficients: 20 more change no k below TOP by 1e-20
# scipy 1.17.1 returns 128.3, the value of order 11, for a of ce_9 at q = 40.996, where the matrix has 93.97 (and a = 91.5 to
# second order in q); above the lowest 40 levels this happens for 55 of 586.
SCIPY_WRONG = {("ce", 9)}
RADIAL_SIZE = 44  # Legendre polynomials
CLASSES = {  # parity under x -> -x and y -> -y: (function, its smallest frequency)
    "even even": ("ce", 0),
    "odd even": ("ce", 1),
    "even odd": ("se", 1),
    "odd odd": ("se", 2),
}


def recurrence(kind, first, q, count, number=float):
    """Diagonal and off-diagonal of the symmetric tridiagonal matrix with eigenvalues a."""
    diagonal = [number(first + 2 * j) ** 2 for j in range(count)]
    off = [q] * (count - 1)
    if kind == "ce" and first == 0:
        off[0] = q * number(2) ** number(0.5)
    if first == 1:
        diagonal[0] += q if kind == "ce" else -q
    return diagonal, off


def angular_value(kind, first, index, k):
    diagonal, off = recurrence(kind, first, (k * FOCUS / 2) ** 2, TERMS)
    return linalg.eigh_tridiagonal(diagonal, off, eigvals_only=True, select="i", select_range=(index, index))[0]


RADIAL = {kind: radial(WALL, int(kind == "se"), RADIAL_SIZE, "D") for kind in ("ce", "se")}


def radial_value(kind, index, k):
    mass, stiffness, weighted = RADIAL[kind]
    q = (k * FOCUS / 2) ** 2
    # 2 q cosh 2 mu = 2 q (2 cosh^2 mu - 1)
    matrix = stiffness - 4 * q * weighted + 2 * q * mass
    return -linalg.eigh(matrix, mass, eigvals_only=True, subset_by_index=(index, index))[0]


def bracketed(kind, first):
    """(angular index, k) of all levels of a class below TOP."""
    found = []
    for radial_index in range(RADIAL_SIZE):
        for index in range(TERMS):
            def difference(k):
                return angular_value(kind, first, index, k) - radial_value(kind, radial_index, k)

            if difference(TOP) > 0:
                break
            found.append((index, optimize.brentq(difference, 1e-3, TOP, xtol=1e-13, rtol=1e-13)))
        if index == 0:
            break
    return found


def eigenvector(kind, first, index, k, terms):
    """Eigenvalue and Fourier coefficients by Rayleigh's iteration, which triples the digits, from double precision."""
    q = (k * mpmath.mpf(4) / 10) ** 2
    start = linalg.eigh_tridiagonal(*recurrence(kind, first, float(q), terms), select="i", select_range=(index, index))
    value, vector = mpmath.mpf(start[0][0]), [mpmath.mpf(x) for x in start[1][:, 0]]
    diagonal, off = recurrence(kind, first, q, terms, mpmath.mpf)
    for _ in range(2):
        vector = solve([d - value for d in diagonal], off, vector)
        norm = mpmath.sqrt(mpmath.fsum(x * x for x in vector))
        vector = [x / norm for x in vector]
        image = [d * x for d, x in zip(diagonal, vector)]
        for j, o in enumerate(off):
            image[j] += o * vector[j + 1]
            image[j + 1] += o * vector[j]
        value = mpmath.fsum(x * y for x, y in zip(vector, image))
    largest = max(vector, key=abs)
    return value, [x * mpmath.sign(largest) for x in vector]


def solve(diagonal, off, right):
    """Symmetric tridiagonal system by elimination from the end; with 60 digits no pivots are needed."""
    diagonal, right = list(diagonal), list(right)
    for j in range(len(off) - 1, -1, -1):
        factor = off[j] / diagonal[j + 1]
        diagonal[j] -= factor * off[j]
        right[j] -= factor * right[j + 1]
    solution = [right[0] / diagonal[0]]
    for j, o in enumerate(off):
        solution.append((right[j + 1] - o * solution[j]) / diagonal[j + 1])
    return solution


def radial_function(kind, first, index, k, terms=TERMS):
    """g at the wall, up to a factor."""
    _, coefficients = eigenvector(kind, first, index, k, terms)
    if kind == "ce" and first == 0:
        coefficients[0] /= mpmath.sqrt(2)
    total = 0
    for j, coefficient in enumerate(coefficients):
        power = mpmath.mpf(2) ** (first + 2 * j)
        total += coefficient * (power + 1 / power if kind == "ce" else power - 1 / power)
    return total


def polished(kind, first, index, guess, terms=TERMS):
    start = (mpmath.mpf(guess), mpmath.mpf(guess) + 1e-9)
    root = mpmath.findroot(lambda k: radial_function(kind, first, index, k, terms), start, tol=1e-40, verify=False)
    assert abs(root - guess) < 1e-9, (kind, first, index, guess, root)
    return root


def check_with_scipy(kind, order, k):
    """Characteristic value against scipy at double precision."""
    q = float((k * FOCUS / 2) ** 2)
    expected = (special.mathieu_a if kind == "ce" else special.mathieu_b)(order, q)
    first = {"ce": order % 2, "se": 2 - order % 2}[kind]
    found = angular_value(kind, first, (order - first) // 2, float(k))
    assert abs(found - expected) < 1e-9 * max(1.0, abs(expected)), (kind, order, q, found, expected)


def check_with_galerkin(rows):
    with open(FOLDER / "ellipse_6_d.csv", encoding="utf-8") as lines:
        table = list(csv.DictReader(line for line in lines if not line.startswith("#")))
    worst = 0.0
    for name in CLASSES:
        listed = [float(row["k"]) for row in table if row["class"] == name]
        here = [float(row[0]) for row in rows if row[1] == name][: len(listed)]
        assert len(here) == len(listed)
        worst = max(worst, np.abs(np.array(here) - listed).max())
    assert worst < 1e-10, worst
    return worst


def main():
    rows = []
    for name, (kind, first) in CLASSES.items():
        for index, guess in bracketed(kind, first):
            k = polished(kind, first, index, guess)
            rows.append((k, name, f"{kind}_{first + 2 * index}", kind, first, index))
    rows.sort()
    for k, _, _, kind, first, index in rows[:40]:
        order = first + 2 * index
        if (kind, order) not in SCIPY_WRONG:
            check_with_scipy(kind, order, k)
    for k, _, _, kind, first, index in rows[::60]:
        again = polished(kind, first, index, float(k), TERMS + 20)
        assert abs(again - k) < 1e-20 * k, (k, again)
    worst = check_with_galerkin(rows)
    with open(FOLDER / "ellipse_6_mathieu.csv", "w", encoding="utf-8") as out:
        out.write(
            f"# Ellipse, half axes 1 and 0.6, wall D, k below {TOP:g}; tests/reference/ellipse_mathieu.py, scipy 1.17.1, "
            "mpmath 1.4.1\n"
        )
        out.write("class,angular,k\n")  # parity under x -> -x and y -> -y, angular Mathieu function
        for row in rows:
            out.write(f"{row[1]},{row[2]},{mpmath.nstr(row[0], 15)}\n")
    print(len(rows), "levels; largest difference from ellipse_levels.py", worst)


if __name__ == "__main__":
    main()
