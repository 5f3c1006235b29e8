"""Yardstick of benches/fast_sum.rs: finufft, type 1, on one thread.

1e5 sources, 1e6 modes, accuracy 1e-10; prints the best and the median wall time of some runs in milliseconds.
Run it beside the bench, on the same machine: `OMP_NUM_THREADS=1 python3 fast_sum_yardstick.py`.
Pinned versions: finufft 2.5.1, numpy 2.4.6.
"""

import time

import finufft
import numpy

SOURCES, MODES, ACCURACY, RUNS = 100_000, 1_000_000, 1e-10, 9

generator = numpy.random.default_rng(1)
# Places as of orbit lengths up to 100 on a grid of step 1e-3 in k.
places = numpy.sort(generator.uniform(0.0, 0.1, SOURCES))
strengths = generator.normal(size=SOURCES) + 1j * generator.normal(size=SOURCES)
for name, x in [("narrow range", places), ("whole period", generator.uniform(-numpy.pi, numpy.pi, SOURCES))]:
    times = []
    for _ in range(RUNS):
        start = time.perf_counter()
        finufft.nufft1d1(x, strengths, MODES, eps=ACCURACY, isign=1, nthreads=1)
        times.append(1e3 * (time.perf_counter() - start))
    times.sort()
    print(f"{name}: best {times[0]:.1f} ms, median {times[len(times) // 2]:.1f} ms")
