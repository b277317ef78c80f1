"""What comparisons.py and strata.py share: 50-digit helpers and the form of a reference table."""
import mpmath as mp
import numpy as np
import statsmodels

mp.mp.dps = 50
VERSIONS = f"mpmath {mp.__version__} (50 digits), statsmodels {statsmodels.__version__}"
rows = {}


def text(value):
    if isinstance(value, (list, tuple, np.ndarray)):
        return ",".join(text(v) for v in value)
    if value in (mp.inf, float("inf")):
        return "inf"
    return mp.nstr(mp.mpf(value), 17)


def row(table, case, source, inputs, expected, tolerance):
    words = [" ".join(f"{k}={text(v)}" for k, v in d.items()) for d in (inputs, expected)]
    rows.setdefault(table, []).append("\t".join([case, source, *words, tolerance]))


def z_of(q):
    return mp.sqrt(2) * mp.erfinv(1 - 2 * mp.mpf(q))


def normal_above(z):
    return mp.erfc(z / mp.sqrt(2)) / 2


def either(above, below):
    return min(mp.mpf(1), 2 * min(above, below))


def solve(f, start):
    """Root in log x of f, which changes sign near start."""
    low = high = mp.log(mp.mpf(start))
    step = mp.mpf("0.05")
    while mp.sign(f(mp.exp(low))) == mp.sign(f(mp.exp(high))):
        low, high, step = low - step, high + step, step * 1.5
    return mp.exp(mp.findroot(lambda u: f(mp.exp(u)), (low, high), solver="anderson", tol=1e-45, maxsteps=200))


def write(script):
    for table, lines in rows.items():
        with open(f"{table}.tsv", "w") as f:
            f.write(f"# Made by {script} with {VERSIONS}; 17 digits kept.\n")
            f.write("case\tsource\tinputs\texpected\ttolerance\n" + "\n".join(lines) + "\n")
