#!/usr/bin/env python3
# samples/make_data.py -- draws the invented records beside it: mains.csv and wards.csv.
#
# Nothing here was measured anywhere. The truth is written out below, so that an answer can be held
# against it: bursts follow a rate that is a product of known factors, times a factor of pure chance for
# each row (gamma, mean 1, shape 2), which makes the counts vary more than a Poisson's on purpose.
# The same files on any machine: only +, -, *, /, a square root and the generator's uniforms are used,
# which all machines round alike; no library's logarithm or power, whose last digit may differ.
# Source of the method: J. von Neumann, Various techniques used in connection with random digits,
#   National Bureau of Standards Applied Mathematics Series 12 (1951) 36-38.
# Checked by: tests/samples_test.py.
"""Usage: make_data.py [FOLDER]   (default: the folder this script stands in)"""

import calendar
import csv
import math
import random
import sys
from pathlib import Path

SEED = 20250114
YEARS = range(2017, 2025)
PIPES = 560

# Bursts per km-year of a new 150 mm PVC main in loam at 50 m of pressure, in an ordinary zone and year.
BASE_RATE = 0.06
AGE_PER_YEAR = 1.012
PRESSURE_PER_METRE = 1.008
HARD_WINTER = {2021: 1.35}
ROW_CHANCE_SHAPE = 2

# material: (share of pipes, first and last year laid, factor on the rate)
MATERIALS = {
    "cast iron": (0.28, 1905, 1962, 1.6),
    "asbestos cement": (0.14, 1950, 1978, 1.3),
    "ductile iron": (0.16, 1966, 2004, 0.8),
    "pvc": (0.24, 1972, 2012, 1.0),
    "polyethylene": (0.18, 1990, 2022, 0.5),
}
SOILS = {"loam": (0.45, 1.0), "clay": (0.35, 1.5), "sand": (0.20, 0.8)}
DIAMETERS = {80: 0.15, 100: 0.30, 150: 0.30, 200: 0.15, 300: 0.10}  # mm: share of pipes
# zone: (share of pipes, usual pressure in metres, factor on the rate)
ZONES = {
    "Harbour": (0.14, 62, 1.1),
    "Hill": (0.20, 42, 0.9),
    "Mill": (0.18, 52, 1.0),
    "Old Town": (0.16, 48, 1.2),
    "Station": (0.20, 55, 1.0),
    "Valley": (0.12, 68, 0.95),
}

# ward: (beds, falls per 1,000 bed-days)
WARDS = {
    "Alder": (28, 5.2), "Birch": (24, 6.1), "Cedar": (30, 4.4), "Elm": (12, 1.1),
    "Hazel": (26, 7.9), "Juniper": (22, 4.8), "Larch": (28, 5.6), "Maple": (18, 6.6),
    "Oak": (32, 5.0), "Rowan": (8, 0.6), "Willow": (26, 5.9), "Yew": (20, 8.4),
}  # fmt: skip
WARD_CHANCE_SHAPE = 8
# Juniper took over another ward's patients here, and its rate doubled.
CHANGED_WARD, CHANGED_FROM, CHANGED_BY = "Juniper", "2024-03", 2.0


class Chance:
    """Draws from one stream of uniforms, by sums and comparisons alone."""

    def __init__(self, seed):
        self.uniform = random.Random(seed).random

    def pick(self, shares):
        """One of the keys of {key: share}; the shares add up to 1."""
        left = self.uniform()
        for key, share in shares.items():
            left -= share
            if left < 0:
                return key
        return key

    def whole(self, low, high):
        """A whole number from low to high, both included, each as likely."""
        return low + int(self.uniform() * (high - low + 1))

    def waiting_time(self):
        """Exponential, mean 1: a falling run of uniforms from x has odd length with chance exp(-x)."""
        whole = 0
        while True:
            first = last = self.uniform()
            length = 1
            while (following := self.uniform()) < last:
                last = following
                length += 1
            if length % 2 == 1:
                return whole + first
            whole += 1

    def gamma(self, shape):
        """Gamma of mean 1, for a whole shape: the mean of that many waiting times."""
        total = 0.0
        for _ in range(shape):  # not sum(), which newer Pythons round differently
            total += self.waiting_time()
        return total / shape

    def count(self, mean):
        """Poisson: how many waiting times fit into the mean."""
        events, spent = 0, self.waiting_time()
        while spent < mean:
            events += 1
            spent += self.waiting_time()
        return events


def compounded(factor, steps):
    """factor to the whole power steps, by multiplying: pow() may differ in the last digit."""
    result = 1.0
    for _ in range(abs(steps)):
        result *= factor
    return result if steps >= 0 else 1 / result


def lay_pipe(chance):
    """One group of mains: what it is, where it lies, how long it is (metres)."""
    material = chance.pick({name: share for name, (share, *_) in MATERIALS.items()})
    _, first, last, _ = MATERIALS[material]
    zone = chance.pick({name: share for name, (share, *_) in ZONES.items()})
    return {
        "zone": zone,
        "material": material,
        "diameter": chance.pick(DIAMETERS),
        "laid": chance.whole(first, last),
        "soil": chance.pick({name: share for name, (share, _) in SOILS.items()}),
        "pressure": ZONES[zone][1] + chance.whole(-12, 12),
        "metres": 800 + int(13000 * chance.uniform() * chance.uniform()),
    }


def burst_rate(pipe, year):
    """The true rate per km-year, before the row's own chance."""
    return (
        BASE_RATE
        * MATERIALS[pipe["material"]][3]
        * SOILS[pipe["soil"]][1]
        * ZONES[pipe["zone"]][2]
        * compounded(AGE_PER_YEAR, year - pipe["laid"])
        * compounded(PRESSURE_PER_METRE, pipe["pressure"] - 50)
        * math.sqrt(150 / pipe["diameter"])
        * HARD_WINTER.get(year, 1.0)
    )


def mains(chance):
    """Rows of mains.csv: one pipe in one year; a few pressures were never read and are blank."""
    yield ["zone", "material", "diameter", "age", "soil", "pressure", "year", "km_years", "bursts"]
    for _ in range(PIPES):
        pipe = lay_pipe(chance)
        for year in YEARS:
            if year < pipe["laid"]:
                continue
            if pipe["material"] == "cast iron":  # some of it is renewed each year
                pipe["metres"] -= int(pipe["metres"] * 0.03 * chance.uniform())
            metre_years = pipe["metres"] // (2 if year == pipe["laid"] else 1)
            mean = burst_rate(pipe, year) * metre_years / 1000 * chance.gamma(ROW_CHANCE_SHAPE)
            bursts = chance.count(mean)
            pressure = "" if chance.uniform() < 0.003 else pipe["pressure"]
            km_years = f"{metre_years // 1000}.{metre_years % 1000:03d}"
            yield [
                pipe["zone"], pipe["material"], pipe["diameter"], year - pipe["laid"], pipe["soil"],
                pressure, year, km_years, bursts,
            ]  # fmt: skip


def wards(chance):
    """Rows of wards.csv: one ward in one month."""
    yield ["ward", "month", "bed_days", "falls"]
    for ward, (beds, per_thousand) in WARDS.items():
        for year in (2022, 2023, 2024):
            for month in range(1, 13):
                label = f"{year}-{month:02d}"
                occupied = 0.82 + 0.16 * chance.uniform()
                bed_days = int(beds * calendar.monthrange(year, month)[1] * occupied)
                rate = per_thousand / 1000
                if ward == CHANGED_WARD and label >= CHANGED_FROM:
                    rate *= CHANGED_BY
                falls = chance.count(bed_days * rate * chance.gamma(WARD_CHANCE_SHAPE))
                yield [ward, label, bed_days, falls]


def write(path, rows):
    with open(path, "w", newline="", encoding="utf-8") as file:
        csv.writer(file, lineterminator="\n").writerows(rows)


def main():
    if len(sys.argv) > 2 or sys.argv[1:2] in (["-h"], ["--help"]):
        sys.exit(__doc__)
    folder = Path(sys.argv[1]) if len(sys.argv) == 2 else Path(__file__).resolve().parent
    write(folder / "mains.csv", mains(Chance(SEED)))
    write(folder / "wards.csv", wards(Chance(SEED + 1)))


if __name__ == "__main__":
    main()
