"""Reference values of the Gaussian orthogonal ensemble for tests/level_statistics.rs.

gap: probability that an interval holds none of the levels that are seen, each level being missing by itself with probability z.
  The kernel sin(pi (x - y))/(pi (x - y)) on an interval of length s has the eigenvalues (2 c/pi) R_n(1)^2, c = pi s/2, where R_n is the
  radial prolate spheroidal function of order 0 (Slepian & Pollak, Bell Syst. Tech. J. 40 (1961) 43); its even and odd ones generate the
  probabilities E(n; s) of the ensemble (Mehta, Random Matrices). E(n; s) is summed with weight z^n, one n at a time.
variance, rigidity: (2/pi^2) and 1/(2 pi^2) times the integral of K(tau)/tau^2 times sin^2(pi L tau) and
  1 - F^2 - 3 F'^2, F = sin(y)/y, y = pi L tau, over the form factor K (Berry, Proc. R. Soc. A 400 (1985) 229), up to tau = 1 by adaptive
  quadrature, beyond with the difference 1 - K, whose integrals converge.
Pinned versions: scipy 1.17.1, mpmath 1.4.1.
Run: `python3 orthogonal_ensemble.py > ../../data/reference/orthogonal_ensemble.csv`.
"""

import math

import mpmath
import numpy
import scipy
from scipy.special import pro_rad1

# The library gives the radial functions for arguments above 1 only; this near, they are off by 1e-9.
ARGUMENT = 1 + 1e-12


def eigenvalues(s):
    """Eigenvalues of the kernel, even and odd ones."""
    c = math.pi * s / 2
    both = ([], [])
    for n in range(60):
        value = 2 * c / math.pi * pro_rad1(0, n, c, ARGUMENT)[0] ** 2
        if not value > 1e-15:
            break
        both[n % 2].append(value)
    return both


def counted(values):
    """Probabilities of 0, 1, 2, ... for independent events."""
    p = numpy.array([1.0])
    for value in values:
        p = numpy.convolve(p, [1 - value, value])
    return p


def gap(s, z):
    even, odd = (counted(values) for values in eigenvalues(s))
    # even[n] = E(2n) + E(2n - 1), odd[n] = E(2n) + E(2n + 1)
    total, last = 0.0, 0.0
    for n in range(min(len(even), len(odd))):
        first = even[n] - last
        last = odd[n] - first
        total += z ** (2 * n) * first + z ** (2 * n + 1) * last
    return total


def form_factor(tau):
    if tau < 1:
        return 2 * tau - tau * mpmath.log(1 + 2 * tau)
    return 2 - tau * mpmath.log((2 * tau + 1) / (2 * tau - 1))


def integral(length, kernel, whole):
    """Integral of K kernel/tau^2; `whole` is that of kernel/tau^2."""
    def missing(tau):
        return (1 - form_factor(tau)) * kernel(mpmath.pi * length * tau) / tau**2
    pieces = [mpmath.mpf(n) / (2 * length) for n in range(0, 2 * length)] + [1]
    pieces[0] = mpmath.mpf(10) ** -12
    near = mpmath.quad(missing, pieces)
    # 1 - K = 1/(12 tau^2) + ...: beyond tau = 30 less than 1e-6/3 of the kernel's size is left, and 1/(36 tau^3) of its mean is added.
    far = mpmath.quad(missing, [1 + mpmath.mpf(n) / 4 for n in range(0, 117)])
    return whole - near - far


def filtered(y):
    if abs(y) < 1e-4:
        return y**4 / 45
    f = mpmath.sin(y) / y
    slope = (mpmath.cos(y) - f) / y
    return 1 - f**2 - 3 * slope**2


def variance(length):
    whole = mpmath.pi**2 * length / 2
    return 2 / mpmath.pi**2 * integral(length, lambda y: mpmath.sin(y) ** 2, whole)


def rigidity(length):
    # For K = 1 the rigidity is L/15.
    whole = 2 * mpmath.pi**2 * mpmath.mpf(length) / 15
    return integral(length, filtered, whole) / (2 * mpmath.pi**2)


print(f"# orthogonal ensemble, tests/reference/orthogonal_ensemble.py, scipy {scipy.__version__}, mpmath {mpmath.__version__}")
print("quantity,length,observed,value")
for observed in (1.0, 0.9, 0.6):
    for s in (0.25, 0.5, 1.0, 1.5, 2.0, 3.0, 4.0):
        print(f"gap,{s},{observed},{gap(s, 1 - observed):.10f}")
for length in (1, 2, 5, 10, 20):
    print(f"variance,{length},1.0,{mpmath.nstr(variance(length), 9)}")
    print(f"rigidity,{length},1.0,{mpmath.nstr(rigidity(length), 9)}")
