"""Levels of ellipses with half axes 1 and b, by a Galerkin method in elliptic coordinates.

x = c cosh(mu) cos(nu), y = c sinh(mu) sin(nu):  -(u_mumu + u_nunu) = k^2 c^2 (cosh(mu)^2 - cos(nu)^2) u.
A function even in y is even in mu with cos(n nu), one odd in y is odd in mu with sin(n nu); the parity of n is that under
the other reflection. Basis: Legendre polynomials of definite parity in mu/mu0 (times 1 - (mu/mu0)^2 for a Dirichlet wall)
times trigonometric functions. Two basis sizes are computed and must agree to the printed accuracy; levels that do not are
refused. Writes data/reference/ellipse_*.csv. Needs numpy 2.4.6, scipy 1.17.1.
"""

import pathlib

import numpy as np
from numpy.polynomial import legendre
from scipy import linalg

TOP = 42.0
FOLDER = pathlib.Path(__file__).resolve().parents[2] / "data" / "reference"


def radial(mu0, parity, size, condition):
    """Mass, stiffness and cosh^2-weighted mass in mu on [0, mu0]."""
    x, w = legendre.leggauss(2 * size + 40)
    x, w = 0.5 * (x + 1.0), 0.5 * w * mu0
    values, slopes = [], []
    for n in range(size):
        p = legendre.Legendre.basis(2 * n + parity)
        d = p.deriv()
        if condition == "D":
            values.append((1 - x**2) * p(x))
            slopes.append(((1 - x**2) * d(x) - 2 * x * p(x)) / mu0)
        else:
            values.append(p(x))
            slopes.append(d(x) / mu0)
    values, slopes = np.array(values), np.array(slopes)
    scale = np.sqrt((values**2 @ w))[:, None]
    values, slopes = values / scale, slopes / scale
    return (values * w) @ values.T, (slopes * w) @ slopes.T, (values * w * np.cosh(x * mu0) ** 2) @ values.T


def angular(odd_in_y, parity, size):
    """The same in nu on [0, pi/2], weight cos^2."""
    x, w = legendre.leggauss(4 * size + 40)
    x, w = 0.25 * np.pi * (x + 1.0), 0.25 * np.pi * w
    orders = np.arange(size) * 2 + parity
    if odd_in_y and parity == 0:
        orders = orders + 2
    if odd_in_y:
        values, slopes = np.sin(np.outer(orders, x)), orders[:, None] * np.cos(np.outer(orders, x))
    else:
        values, slopes = np.cos(np.outer(orders, x)), -orders[:, None] * np.sin(np.outer(orders, x))
    return (values * w) @ values.T, (slopes * w) @ slopes.T, (values * w * np.cos(x) ** 2) @ values.T


def levels(b, condition, odd_in_y, parity, size):
    c = np.sqrt(1 - b * b)
    mu0 = np.arctanh(b)
    m1, k1, c1 = radial(mu0, int(odd_in_y), size[0], condition)
    m2, k2, c2 = angular(odd_in_y, parity, size[1])
    stiffness = np.kron(k1, m2) + np.kron(m1, k2)
    mass = c * c * (np.kron(c1, m2) - np.kron(m1, c2))
    energies = linalg.eigh(stiffness, mass, eigvals_only=True)
    return np.sqrt(np.maximum(energies[energies < TOP * TOP], 0.0))


def main():
    for b, condition in [(0.8, "D"), (0.6, "D"), (0.8, "N")]:
        rows = []
        worst = 0.0
        for odd_in_y in (False, True):
            for parity in (0, 1):
                coarse = levels(b, condition, odd_in_y, parity, (24, 38))
                fine = levels(b, condition, odd_in_y, parity, (28, 44))
                assert len(coarse) == len(fine)
                # the zero level of a Neumann wall is a square root of rounding
                fine[fine < 1e-4] = 0.0
                coarse[coarse < 1e-4] = 0.0
                worst = max(worst, np.abs(coarse - fine).max())
                even_in_x = parity == (1 if odd_in_y else 0)
                name = ("even" if even_in_x else "odd") + " " + ("odd" if odd_in_y else "even")
                rows += [(k, name) for k in fine]
        assert worst < 1e-9, worst
        rows.sort()
        path = FOLDER / f"ellipse_{round(10 * b)}_{condition.lower()}.csv"
        with open(path, "w", encoding="utf-8") as out:
            out.write(
                f"# Ellipse, half axes 1 and {b}, wall {condition}, k below {TOP}; tests/reference/ellipse_levels.py, "
                f"scipy 1.17.1; two sizes differ by {worst:.0e}\n"
            )
            out.write("class,k\n")  # parity under x -> -x, parity under y -> -y
            for k, name in rows:
                out.write(f"{name},{k:.12g}\n")
        print(path.name, len(rows), worst)


if __name__ == "__main__":
    main()
