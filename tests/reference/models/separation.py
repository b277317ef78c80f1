"""Small designs and which of their rows are separated: python3 separation.py  writes separation_cases.json.

Columns hold small whole numbers, so ranks are exact (fractions). The separated rows are those that a linear programme
(scipy.optimize.linprog, HiGHS) can push down: maximise sum s, X d = 0 where y > 0, X d + s <= 0 where y = 0, 0 <= s <= 1.
A coefficient's fate: its least and greatest value among such d in the box -1..1, on the columns that are not aliased.
Found independently of Countsel, which uses no linear programme.
"""
import json, os
from fractions import Fraction
import numpy as np
from scipy.optimize import linprog

rng = np.random.default_rng(5)


def independent(rows):
    """Columns, in order, that the ones before do not explain (exact)."""
    kept, basis = [], []
    for j in range(len(rows[0])):
        v = [Fraction(int(r[j])) for r in rows]
        for pivot, b in basis:
            if v[pivot] != 0:
                f = v[pivot] / b[pivot]
                v = [a - f * c for a, c in zip(v, b)]
        nonzero = [i for i, a in enumerate(v) if a != 0]
        if nonzero:
            basis.append((nonzero[0], v))
            kept.append(j)
    return kept


def draw():
    n, p = int(rng.integers(5, 14)), int(rng.integers(1, 5))
    kind = rng.integers(0, 3, p)
    columns = [rng.integers(0, 2, n) if k == 0 else rng.integers(-2, 3, n) if k == 1 else rng.integers(0, 5, n) for k in kind]
    if p > 2 and rng.random() < 0.2:
        columns[2] = columns[0] + columns[1]
    y = rng.poisson(rng.choice([0.3, 0.6, 1.0]), n)
    if rng.random() < 0.3 and p > 1:  # make a numeric separation likely
        y = np.where(columns[0] > columns[1], 0, y)
    return np.column_stack([np.ones(n, int)] + columns), y


def solve(x, y):
    kept = independent(x.tolist())
    z = x[:, kept].astype(float)
    k, zero = len(kept), np.flatnonzero(y == 0)
    m = len(zero)
    if m == 0:
        return kept, [], ["finite"] * k
    equal = z[y > 0]
    result = linprog(np.r_[np.zeros(k), -np.ones(m)],
                     A_ub=np.hstack([z[zero], np.eye(m)]), b_ub=np.zeros(m),
                     A_eq=np.hstack([equal, np.zeros((len(equal), m))]) if len(equal) else None,
                     b_eq=np.zeros(len(equal)) if len(equal) else None,
                     bounds=[(None, None)] * k + [(0, 1)] * m, method="highs")
    separated = [int(i) for i, s in zip(zero, result.x[k:]) if s > 0.5]
    fate = []
    for j in range(k):
        ends = []
        for sign in (1, -1):
            r = linprog(sign * np.eye(k)[j], A_ub=z[zero], b_ub=np.zeros(m), A_eq=equal if len(equal) else None,
                        b_eq=np.zeros(len(equal)) if len(equal) else None, bounds=[(-1, 1)] * k, method="highs")
            ends.append(sign * r.fun)
        falls, rises = ends[0] < -1e-7, ends[1] > 1e-7
        fate.append("undetermined" if falls and rises else "minus" if falls else "plus" if rises else "finite")
    return kept, separated, fate


cases, plain = [], 0
while len(cases) < 400:
    x, y = draw()
    if y.sum() == 0:
        continue
    kept, separated, fate = solve(x, y)
    if not separated:
        plain += 1
        if plain > 120:
            continue
    cases.append(dict(columns=x[:, 1:].T.tolist(), count=y.tolist(), kept=[int(k) for k in kept], separated=separated, fate=fate))
here = os.path.dirname(os.path.abspath(__file__))
with open(os.path.join(here, "separation_cases.json"), "w") as f:
    f.write("[\n" + ",\n".join(json.dumps(c) for c in cases) + "\n]\n")
print(len(cases), sum(bool(c["separated"]) for c in cases), sum("undetermined" in c["fate"] for c in cases))
