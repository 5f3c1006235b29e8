"""Writes data/joint_chain.csv: traces of the chain of hits at a joint of a straight wall and an arc.

numpy 2.4.6. Run as `python joint_chain.py > ../../data/joint_chain.csv` (a few minutes).

The trace. In units (D/k)^(1/2) the n-fold orbit has the coefficient

    J_n(c) = tr (K_c)^n - tr_{s<0} (K_0)^n,
    K_c(s, s') = exp(i (s - s')^2 / 2) / sqrt(2 pi i) * (exp(-i c s^2) where s > 0, 1 where s < 0).

Rotation. Turning all variables by 45 degrees makes the flight a real Gaussian, exp(-(s - s')^2 / 2) / sqrt(2 pi), and the
arc a factor exp(c s^2), so that J_n(c) is real for c < 0 (arc that defocuses) and for c > 0 the boundary value c - i0 of
that analytic function. With s = r t, r = exp(i alpha), on s > 0 alone and s real on s < 0, the modulus of the integrand is
bounded by the exponential of

    -cos(2 alpha) (t - t')^2 / 2 + c cos(2 alpha) t^2         between variables t, t' > 0,
    -cos(2 alpha) t^2 / 2 - cos(alpha) t |s| - s^2 / 2        between t > 0 and s < 0.

For -pi / 2 < alpha < -pi / 4, where cos(2 alpha) < 0 < cos(alpha), all of this decays when c > 1: the integrals converge
absolutely, no window and no extrapolation is needed, and the kernel is smooth on each half line, so that Gauss-Legendre
panels and matrix powers give nearly machine accuracy. At c = 1 (and at c = 1 - cos(pi / m), m <= n, below it) J_n is
continuous but not analytic: hits exactly on the joint are stationary there. For c < 0 no rotation is needed.

Table. 'focusing' rows are nodes in x = c^(-1/2) between 0 (c infinite: the half line s > 0 absorbs) and c = FOCUSING_MIN,
value J_n. 'defocusing' rows are nodes in y = z / (1 + z), z = (-c)^(-1/2), between 0 and c = -DEFOCUSING_MIN, value
J_n / (1 + z). Both are Chebyshev points of the second kind. 'check' rows hold c and J_n between the nodes, from another
contour and other panels; 'orthant' rows likewise, from a formula for n = 3.
"""

import sys

import numpy as np

FOCUSING_MIN = 1.02
DEFOCUSING_MIN = 0.01
FOCUSING_NODES = 49
DEFOCUSING_NODES = 33
REPETITIONS = 20
CHECKS = (1.021, 1.05, 1.3, 2.0, 3.7, 20.0, 400.0, -0.0103, -0.03, -0.7, -4.0, -150.0)
# Bridges of REPETITIONS steps that start further out reach the joint with probability below exp(-2 DEPTH^2 / n) = 1e-21.
DEPTH = 22.0
# exp(-NEGLIGIBLE) is below rounding.
NEGLIGIBLE = 42.0


def panels(edges, order):
    node, weight = np.polynomial.legendre.leggauss(order)
    edges = np.asarray(edges)
    half = (edges[1:] - edges[:-1]) / 2
    middle = (edges[1:] + edges[:-1]) / 2
    return (middle[:, None] + half[:, None] * node).ravel(), (half[:, None] * weight).ravel()


def graded(first, growth, longest, end):
    """Panel edges from 0 to end: lengths grow geometrically from `first` up to `longest`."""
    edges = [0.0, min(first, end)]
    while edges[-1] < end:
        edges.append(min(edges[-1] + min(longest, (growth - 1) * edges[-1]), end))
    return edges


def power_traces(first, first_weight, second, second_weight, phase):
    """Diagonals of the powers of the Gaussian kernel on two half lines with the given exponent at each node."""
    node = np.concatenate([first, second])
    root = np.sqrt(np.concatenate([first_weight, second_weight]))
    exponent = -((node[:, None] - node[None, :]) ** 2) / 2 + (phase[:, None] + phase[None, :]) / 2
    kernel = np.exp(exponent) * root[:, None] * root[None, :] / np.sqrt(2 * np.pi)
    power, diagonals = kernel, []
    for _ in range(REPETITIONS):
        diagonals.append(np.diag(power))
        power = power @ kernel
    return diagonals


FLAT = {}


def chain(inverse, focusing, alpha, order, growth):
    """J_1 .. J_REPETITIONS at |c| = 1 / inverse^2; the positive variable is scaled by |c|^(-1/2), so inverse = 0 works."""
    turn = np.exp(1j * alpha) if focusing else 1.0
    sign = 1.0 if focusing else -1.0
    # Decay of one positive variable on its own, in the scaled variable; then panels fine enough for exp(-t |s|).
    single = -(turn * turn).real * (sign - inverse**2) if focusing else 1.0
    reach = np.sqrt(NEGLIGIBLE / single)
    longest = min(0.15 * reach, 1.5 / max(inverse, 1e-3))
    fine = min(0.125 / max(reach, 1.0), 0.1)
    t, t_weight = panels(graded(fine, growth, longest, reach), order)
    u, u_weight = panels(graded(min(0.3, 0.5 / (reach * max(inverse, 1e-3))), growth, 1.5, DEPTH), order)
    positive = inverse * turn * t
    bend = np.concatenate([np.zeros_like(u), sign * (turn * t) ** 2])
    chained = power_traces(-u, u_weight, positive, inverse * turn * t_weight, bend)
    key = (len(u), u[0], order)
    if key not in FLAT:
        flat = power_traces(-u, u_weight, u, u_weight, np.zeros(2 * len(u)))
        FLAT[key] = [diagonal[: len(u)] for diagonal in flat]
    return np.array(
        [(c[: len(u)] - f).sum() + c[len(u) :].sum() for c, f in zip(chained, FLAT[key])]
    )


def orthants(c, steps=4000):
    """J_3 by a formula that shares nothing with the quadrature: the signs of three hits select an orthant of a Gaussian with
    matrix Q, of weight det(Q)^(-1/2) (1/8 + sum arcsin(rho) / (4 pi)) (F. N. David, Biometrika 40, 458, 1953; from memory),
    continued from -|c| to c - i0 with the branches of roots and arcs followed by continuity."""
    total = 0.0
    for pattern in range(1, 8):
        positive = [pattern >> hit & 1 for hit in range(3)]
        roots = arcs = None
        for turn in np.exp(1j * np.pi * np.arange(steps + 1) / steps):
            form = np.full((3, 3), -1.0 + 0j)
            np.fill_diagonal(form, [2 + 2 * abs(c) * turn * p for p in positive])
            covariance = np.linalg.inv(form)
            new_roots = np.sqrt(np.append(np.diag(covariance), np.linalg.det(form)))
            if roots is not None:
                new_roots = np.where(abs(new_roots - roots) < abs(new_roots + roots), new_roots, -new_roots)
            roots = new_roots
            pairs = ((0, 1), (1, 2), (2, 0))
            sines = [(1 if positive[i] == positive[j] else -1) * covariance[i, j] / (roots[i] * roots[j]) for i, j in pairs]
            principal = np.arcsin(np.array(sines))
            if arcs is None:
                arcs = principal
            else:
                shift = 2 * np.pi * np.arange(-2, 3)[:, None]
                branches = np.concatenate([principal + shift, np.pi - principal + shift])
                arcs = branches[abs(branches - arcs).argmin(0), range(3)]
        total += (1 / 8 + arcs.sum() / (4 * np.pi)) / roots[3]
    # The flat wall's share: the mean maximum of a bridge of three steps.
    return total - (2**0.5 + 0.5**0.5) / (6 * np.pi)


def chebyshev(count, end):
    return end * (1 - np.cos(np.pi * np.arange(count) / (count - 1))) / 2


def interpolate(nodes, values, at):
    weight = (-1.0) ** np.arange(len(nodes))
    weight[0] /= 2
    weight[-1] /= 2
    factor = weight / (at - nodes)
    return (factor[:, None] * values).sum(0) / factor.sum()


def main():
    standard = dict(alpha=-1.2, order=16, growth=1.6)
    other = dict(alpha=-1.1, order=20, growth=1.5)
    x = chebyshev(FOCUSING_NODES, FOCUSING_MIN**-0.5)
    y = chebyshev(DEFOCUSING_NODES, 1 / (1 + DEFOCUSING_MIN**0.5))
    z = y / (1 - y)
    focusing = np.array([chain(v, True, **standard) for v in x])
    defocusing = np.array([chain(v, False, **standard) / (1 + v) for v in z])
    rows, worst_resolution, worst_table = [], np.zeros(REPETITIONS), np.zeros(REPETITIONS)
    for c in CHECKS:
        inverse = abs(c) ** -0.5
        value = chain(inverse, c > 0, **other)
        again = chain(inverse, c > 0, **standard)
        if c > 0:
            table = interpolate(x, focusing, inverse)
        else:
            table = interpolate(y, defocusing, inverse / (1 + inverse)) * (1 + inverse)
        worst_resolution = np.maximum(worst_resolution, abs(value - again))
        worst_table = np.maximum(worst_table, abs(value - table))
        rows += [("check", n + 1, c, value[n]) for n in range(2, REPETITIONS)]
    for n in range(2, REPETITIONS):
        rows += [("focusing", n + 1, a, b) for a, b in zip(x, focusing[:, n])]
        rows += [("defocusing", n + 1, a, b) for a, b in zip(y, defocusing[:, n])]
    rows += [("orthant", 3, c, orthants(c)) for c in CHECKS if c > 0]
    print("# Computed by tests/reference/joint_chain.py (numpy 2.4.6): Gauss-Legendre panels on rotated half lines; the check")
    print(f"# rows differ by at most {worst_resolution[2:].max():.1e} between two contours and by {worst_table[2:].max():.1e} from the interpolated table.")
    print("kind,repetition,at,re,im")
    for kind, n, at, value in rows:
        print(f"{kind},{n},{at:.16g},{value.real:.13f},{value.imag + 0.0:.13f}")
    for n in range(REPETITIONS):
        print(n + 1, worst_resolution[n], worst_table[n], file=sys.stderr)


if __name__ == "__main__":
    main()
