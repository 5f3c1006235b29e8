"""Writes data/measured-cavity.csv: an invented measurement of the cavity in data/example-cavity.toml.

numpy 2.4.6. Run in the root of the repository:

    cargo run --release --quiet -- levels data/example-cavity.toml --frequency 0:16 --format csv --quiet \
        | python tests/reference/example_cavity_measured.py > data/measured-cavity.csv

Everything that is done to the computed levels is invented, with a fixed seed, and told in the first lines of the file: no network
analyser has seen this cavity. Every resonance gets Gaussian noise of 0.03 mean spacings and that as its error, and a width of the size
that copper walls give (a quality factor of some thousands). Two levels are left out, one is put in, and two that are closer to each
other than their widths are read as one at their middle.
"""

import csv
import sys

import numpy as np

SEED = 20
NOISE = 0.03  # mean spacings
SPAN = 8  # levels on either side from which the local mean spacing is taken
QUALITY = 3000.0
MISSING = (88, 150)  # numbers of the levels that are left out
FALSE = 121.4  # where one is put in: number of the level below, and how far to the next
PAIR_FROM = 40  # the closest pair above this level is not resolved


def spacings(levels):
    """Local mean spacing at each level."""
    count = len(levels)
    first = np.clip(np.arange(count) - SPAN, 0, None)
    last = np.clip(np.arange(count) + SPAN, None, count - 1)
    return (levels[last] - levels[first]) / (last - first)


def main():
    levels = np.array([float(row["frequency"]) for row in csv.DictReader(sys.stdin)])
    generator = np.random.default_rng(SEED)
    spacing = spacings(levels)
    width = levels / QUALITY
    candidates = [n for n in range(PAIR_FROM, len(levels) - 1) if n + 1 not in MISSING and n + 2 not in MISSING]
    pair = min(candidates, key=lambda n: (levels[n + 1] - levels[n]) / spacing[n])
    assert levels[pair + 1] - levels[pair] < width[pair], "the pair is wider than the resonances"
    rows = []
    for n, level in enumerate(levels):
        if n + 1 in MISSING or n == pair + 1:
            continue
        true = 0.5 * (level + levels[n + 1]) if n == pair else level
        rows.append((true, spacing[n], width[n]))
    below = int(FALSE) - 1
    share = FALSE - int(FALSE)
    false = (1 - share) * levels[below] + share * levels[below + 1]
    rows.append((false, spacing[below], width[below]))
    rows.sort()
    print("# Invented example, not a measurement: levels of data/example-cavity.toml as a network analyser might give them, GHz.")
    print("# Made by tests/reference/example_cavity_measured.py from computed levels: Gaussian noise of 0.03 mean spacings (seed 20);")
    print(
        f"# levels {MISSING[0]} ({levels[MISSING[0] - 1]:.4f}) and {MISSING[1]} ({levels[MISSING[1] - 1]:.4f}) are left out, "
        f"{false:.4f} is put in, and {pair + 1} and {pair + 2}"
    )
    print(f"# ({levels[pair]:.4f} and {levels[pair + 1]:.4f}), which are closer than their widths, are read as one at their middle.")
    print("frequency,error,width")
    for level, distance, broad in rows:
        error = NOISE * distance
        print(f"{level + error * generator.standard_normal():.5f},{error:.5f},{broad:.5f}")


if __name__ == "__main__":
    main()
