# tests/bench/rate_limits.py -- limits for a million rows against SciPy's chi-square quantiles, in one run.
#
#   python3 rate_limits.py PATH/TO/bench_rate_limits
#
# Three columns of 1,000,000 counts: as counts repeat (Poisson, mean 6), all different (a shuffle of 0 to 999,999),
# and all different and large (1e6 to 1e9). SciPy is timed on chdtri, the quickest way it has (no argument checks),
# best of three; where counts repeat it is timed as people call it, on the whole column, and on the distinct counts
# alone, which no one-line call does. Prints seconds, ratios and how far the two answers differ.
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import scipy
from scipy.special import chdtri

ROWS = 1_000_000


def best(function, rounds=3):
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        answer = function()
        times.append(time.perf_counter() - start)
    return min(times), answer


def scipy_limits(counts):
    low = np.where(counts > 0, chdtri(2 * np.maximum(counts, 1), 0.975) / 2, 0)
    return low, chdtri(2 * counts + 2, 0.025) / 2


def main():
    draw = np.random.default_rng(20240501)
    large = np.unique(draw.integers(10**6, 10**9, ROWS + 20_000))[:ROWS].astype(float)
    columns = {
        "repeat": draw.poisson(6.0, ROWS).astype(float),
        "differ": draw.permutation(ROWS).astype(float),
        "large": draw.permutation(large),
    }
    exposures = 1.0 + np.arange(ROWS) // 8 % 7
    print(f"SciPy {scipy.__version__}, {ROWS} rows; seconds, and how many times faster Countsel is")
    for name, counts in columns.items():
        took, (low, high) = best(lambda: scipy_limits(counts))
        distinct, _ = best(lambda: scipy_limits(np.unique(counts)))
        with tempfile.NamedTemporaryFile(suffix=".f64") as file:
            file.write(counts.astype("<f8").tobytes())
            file.flush()
            for hands in ("1", "2"):
                out = subprocess.run([sys.argv[1], file.name, hands], capture_output=True, text=True, check=True).stdout
                for line in out.splitlines():
                    method, seconds, *ends = line.split()
                    note = ""
                    if method == "exact":
                        ours = np.array(list(map(float, ends)))
                        theirs = np.array([end[i] / exposures[i] for i in (0, -1) for end in (low, high)])
                        with np.errstate(invalid="ignore"):
                            note = f", answers differ by {np.nanmax(np.abs(ours / theirs - 1)):.1e}"
                    ratio = f"{took / float(seconds):.0f} times" if method == "exact" else "no counterpart"
                    print(f"{name:7} {method:6} {hands} hands: SciPy {took:.3f} (distinct counts alone {distinct:.3f}), "
                          f"Countsel {float(seconds):.4f}: {ratio}{note}")


if __name__ == "__main__":
    main()
