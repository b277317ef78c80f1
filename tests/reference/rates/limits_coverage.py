"""How often each method's limits for one rate cover the truth, summed over the counts.

The limits come from the engine (COUNTSEL_ENGINE or build/release/countsel), the chances of the counts from
SciPy's Poisson; counts beyond 1e-12 of chance are left out. A method without limits at a count covers nothing
there. Writes limits_coverage.tsv beside this script.
"""

import json
import os
import subprocess
from pathlib import Path

import numpy
from scipy import stats

HERE = Path(__file__).resolve().parent
ENGINE = os.environ.get("COUNTSEL_ENGINE", str(HERE.parents[2] / "build/release/countsel"))
METHODS = ["exact", "mid-p", "score", "likelihood", "jeffreys", "byar", "wald", "log-wald", "square-root", "bayes"]
MEANS = [0.5, 1, 2, 3.5, 5, 7.5, 10, 20, 50, 200]
COUNTS = list(range(400))


def limits(method):
    request = {
        "ask": "how_often",
        "of": {"count": COUNTS, "exposure": [1] * len(COUNTS)},
        "with": {"limits": method, "confidence": 0.95, "totals": "keep"},
        "want": ["tables"],
    }
    done = subprocess.run([ENGINE], input=json.dumps(request) + "\n", capture_output=True, text=True, check=True)
    table = json.loads(done.stdout)["answer"]["tables"]["rates"]
    return [numpy.array([numpy.nan if value is None else float(value) for value in table[side]]) for side in ("low", "high")]


def main():
    lines = [
        "# Share of all counts, by their chance, whose 95% limits cover the true mean. Made by limits_coverage.py",
        "# (limits: the engine; chances: SciPy's Poisson; nothing simulated).",
        "method\t" + "\t".join(f"mean {mean:g}" for mean in MEANS),
    ]
    for method in METHODS:
        low, high = limits(method)
        row = []
        for mean in MEANS:
            chance = stats.poisson.pmf(COUNTS, mean)
            row.append(f"{chance[(low <= mean) & (mean <= high)].sum():.4f}")
        lines.append(method + "\t" + "\t".join(row))
    (HERE / "limits_coverage.tsv").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
