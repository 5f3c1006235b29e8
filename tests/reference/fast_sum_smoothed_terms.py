"""Reference values of smoothed terms for tests/fast_sum_smoothing.rs.

Convolves k J1(k l), sqrt(k) exp(i k l) and exp(i k l) with a Gaussian by numerical integration along the real k axis at 40 digits.
Below k = 0 the square root is i sqrt(|k|). Pinned version: mpmath 1.4.1.
Run: `python3 fast_sum_smoothed_terms.py > fast_sum_smoothed_terms.csv`.
"""

import mpmath
from mpmath import mp, mpf

mp.dps = 40

WAVES = {
    # amplitude and its derivative, both times exp(i k l), of the term Re[...]
    "strip": lambda k, l: (k * mpmath.besselj(1, k * l), k * l * mpmath.besselj(0, k * l)),
    "torus": lambda k, l: (
        mpmath.sqrt(mpmath.mpc(k)) * mpmath.expj(k * l),
        (0.5 / mpmath.sqrt(mpmath.mpc(k)) + 1j * l * mpmath.sqrt(mpmath.mpc(k))) * mpmath.expj(k * l),
    ),
    "constant": lambda k, l: (mpmath.expj(k * l), 1j * l * mpmath.expj(k * l)),
}


def smoothed(wave, k, length, width, part):
    """Mean of one part (0 value, 1 derivative) over a normal distribution around k; the real part is wanted."""
    reach = 13

    def integrand(x):
        return mpmath.re(wave(k + width * x, length)[part]) * mpmath.exp(-x * x / 2)

    breaks = {mpf(x) for x in range(-reach, reach + 1)}
    if abs(k / width) < reach:
        breaks.add(-k / width)
    return mpmath.quad(integrand, sorted(breaks)) / mpmath.sqrt(2 * mpmath.pi)


print(f"# smoothed terms, tests/reference/fast_sum_smoothed_terms.py, mpmath {mpmath.__version__}, 40 digits")
print("amplitude,k,length,smoothing,staircase,density")
CASES = [
    (1.0, 4.0, 0.3), (0.4, 1.0, 0.3), (2.0, 0.5, 0.3), (1.5, 12.0, 0.5), (3.0, 20.0, 0.25), (8.0, 2.0, 0.25),
    (10.0, 4.0, 0.5), (20.0, 6.0, 0.3), (20.0, 21.0, 0.3), (40.0, 15.0, 0.15), (40.0, 0.25, 0.15), (100.0, 30.0, 0.05),
]
for name, wave in WAVES.items():
    for k, length, width in CASES:
        values = [smoothed(wave, mpf(k), mpf(length), mpf(width), part) for part in (0, 1)]
        print(f"{name},{k},{length},{width}," + ",".join(mpmath.nstr(value, 17) for value in values))
