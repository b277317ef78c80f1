# tests/samples_test.py -- do the samples hold: the data, the requests, the script?
#
# The answers are held against sums made here from the CSV itself, limits by SciPy's chi-square
# quantiles and a fit by statsmodels, so that a wrong figure on the first page a stranger tries fails.
import csv
import json
import os
import subprocess
import sys
import tempfile
import unittest
from collections import defaultdict
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
SAMPLES = ROOT / "samples"
ENGINE = os.environ.get("COUNTSEL_ENGINE", str(ROOT / "build/release/countsel"))
REFUSED = {"a count below zero": "bad_count", "a slip in a name": "unknown_key"}


def rows(name):
    with open(SAMPLES / name, encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def totals(table, group, count, exposure):
    """{level: (events, exposure)} in order of first appearance."""
    sums = defaultdict(lambda: (0, 0.0))
    for row in table:
        events, looked = sums[row[group]]
        sums[row[group]] = (events + int(row[count]), looked + float(row[exposure]))
    return dict(sums)


class Data(unittest.TestCase):
    def test_the_script_draws_the_files_that_stand_beside_it(self):
        with tempfile.TemporaryDirectory() as folder:
            subprocess.run([sys.executable, SAMPLES / "make_data.py", folder], check=True)
            for name in ("mains.csv", "wards.csv"):
                self.assertEqual(Path(folder, name).read_bytes(), (SAMPLES / name).read_bytes(), name)

    def test_mains_is_what_the_questions_need(self):
        table = rows("mains.csv")
        columns = ["zone", "material", "diameter", "age", "soil", "pressure", "year", "km_years", "bursts"]
        self.assertEqual(list(table[0]), columns)
        self.assertGreater(len(table), 3000)
        self.assertTrue(all(float(row["km_years"]) > 0 for row in table))
        rate = {level: events / km for level, (events, km) in self.by_material(table).items()}
        self.assertGreater(rate["cast iron"], 2 * rate["pvc"])

    def test_mains_varies_more_than_a_poisson(self):
        # Pearson's statistic over its degrees of freedom, with one rate for each cell of everything but
        # year: what is left is chance alone, and a Poisson's would be 1 to within 0.03 or so.
        table = rows("mains.csv")
        cells = defaultdict(list)
        for row in table:
            cells[row["zone"], row["material"], row["diameter"], row["soil"]].append(row)
        statistic, df = 0.0, 0
        for cell in cells.values():
            rate = sum(int(row["bursts"]) for row in cell) / sum(float(row["km_years"]) for row in cell)
            if rate == 0:
                continue
            fitted = [rate * float(row["km_years"]) for row in cell]
            statistic += sum((int(row["bursts"]) - mu) ** 2 / mu for row, mu in zip(cell, fitted))
            df += len(cell) - 1
        self.assertGreater(statistic / df, 1.2)

    def test_wards_has_a_row_for_each_ward_and_month(self):
        table = rows("wards.csv")
        self.assertEqual(list(table[0]), ["ward", "month", "bed_days", "falls"])
        months = defaultdict(set)
        for row in table:
            months[row["ward"]].add(row["month"])
        self.assertEqual({len(seen) for seen in months.values()}, {36})
        self.assertIn("0", {row["falls"] for row in table})

    @staticmethod
    def by_material(table):
        return totals(table, "material", "bursts", "km_years")


class Requests(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        text = (SAMPLES / "requests.jsonl").read_text(encoding="utf-8")
        cls.asked = [json.loads(line) for line in text.splitlines()]
        done = subprocess.run(
            [ENGINE, "--files", SAMPLES], input=text, capture_output=True, encoding="utf-8", timeout=120
        )
        cls.status, cls.err = done.returncode, done.stderr
        cls.replies = [json.loads(line) for line in done.stdout.splitlines()]
        cls.by_id = {reply["id"]: reply for reply in cls.replies}

    def answer(self, name):
        return self.by_id[name]["answer"]

    def test_each_is_answered_in_order_and_quietly(self):
        self.assertEqual((self.status, self.err), (0, ""))
        self.assertEqual([reply["id"] for reply in self.replies], [request["id"] for request in self.asked])
        for request, reply in zip(self.asked, self.replies):
            with self.subTest(request["id"]):
                self.assertEqual(reply["ask"], request["ask"])
                if request["id"] in REFUSED:
                    self.assertEqual(reply["refused"]["code"], REFUSED[request["id"]])
                else:
                    self.assertIn("answer", reply)

    def test_refusals_name_the_place_and_help(self):
        below = self.by_id["a count below zero"]["refused"]
        self.assertEqual(below["where"][0]["row"], 2)
        self.assertEqual(below["where"][0]["cell"], "Falls.C6")
        self.assertIn("confidence", json.dumps(self.by_id["a slip in a name"]["refused"]))

    def check_rates(self, table, sums, per, level):
        from scipy.stats import chi2

        self.assertEqual(table["label"], list(sums))
        tail = (1 - level) / 2
        for row, (events, exposure) in enumerate(sums.values()):
            low = chi2.ppf(tail, 2 * events) / 2 if events else 0
            expected = {
                "count": events, "exposure": exposure, "rate": per * events / exposure,
                "low": per * low / exposure, "high": per * chi2.isf(tail, 2 * events + 2) / 2 / exposure,
            }  # fmt: skip
            for column, value in expected.items():
                self.assertAlmostEqual(table[column][row], value, delta=1e-9 * max(1, value), msg=column)

    def test_rates_by_material(self):
        answer = self.answer("by material")
        sums = Data.by_material(rows("mains.csv"))
        self.check_rates(answer["tables"]["rates"], sums, 100, 0.95)
        self.assertEqual(answer["figures"]["count"], sum(events for events, _ in sums.values()))
        self.assertIn("bursts per 100 km-years", json.dumps(answer["heads"]))

    def test_rates_of_the_wards(self):
        answer = self.answer("falls by ward")
        sums = totals(rows("wards.csv"), "ward", "falls", "bed_days")
        self.check_rates(answer["tables"]["rates"], sums, 1000, 0.95)
        self.assertEqual(set(answer) & {"figures", "picture", "shown"}, set())

    def test_only_keeps_one_year(self):
        table = self.answer("this year by zone")["tables"]["rates"]
        kept = [row for row in rows("mains.csv") if row["year"] == "2024"]
        sums = totals(kept, "zone", "bursts", "km_years")
        self.assertEqual(table["label"], list(sums))
        self.assertEqual(table["count"], [events for events, _ in sums.values()])
        self.assertIn("shown", self.answer("this year by zone"))

    def test_none_seen_has_an_upper_limit(self):
        table = self.answer("none seen")["tables"]["rates"]
        self.assertEqual((table["rate"][0], table["low"][0]), (0, 0))
        # No event in T: the upper limit is -ln(0.025)/T.
        self.assertAlmostEqual(table["high"][0], 100 * 3.6888794541139363 / 31.5, places=9)

    def test_cast_iron_against_pvc(self):
        figures = self.answer("iron or pvc")["figures"]
        sums = Data.by_material(rows("mains.csv"))
        (iron, iron_km), (pvc, pvc_km) = sums["cast iron"], sums["pvc"]
        self.assertAlmostEqual(figures["ratio"], iron / iron_km / (pvc / pvc_km), places=10)
        self.assertAlmostEqual(figures["difference"], 100 * (iron / iron_km - pvc / pvc_km), places=8)
        self.assertGreater(figures["ratio_low"], 1)
        self.assertLess(figures["p_value"], 1e-10)

    def test_what_drives_agrees_with_statsmodels(self):
        import numpy
        import pandas
        import statsmodels.api as sm

        table = pandas.read_csv(SAMPLES / "mains.csv").dropna()
        columns = {"age": table.age, "log diameter": numpy.log(table.diameter), "pressure": table.pressure}
        answer = self.answer("drivers")
        ratios = pandas.DataFrame(answer["tables"]["ratios"])
        levels = ratios[ratios.level.notna() & ratios.low.notna()]
        for term, level in zip(levels.term, levels.level):
            columns[f"{term} {level}"] = (table[term].astype(str) == level).astype(float)
        self.assertEqual(len(columns), 3 + 4 + 2 + 5 + 7)
        design = sm.add_constant(pandas.DataFrame(columns))
        fit = sm.GLM(table.bursts, design, family=sm.families.Poisson(), exposure=table.km_years.to_numpy())
        fit = fit.fit(scale="X2", tol=1e-13)
        self.assertEqual(ratios.term[0], "baseline")
        for row in ratios[ratios.low.notna()].itertuples():
            name = row.term if row.level is None else f"{row.term} {row.level}"
            name = "const" if row.Index == 0 else name
            with self.subTest(name):
                self.assertAlmostEqual(row.log_ratio, fit.params[name], places=8)
                self.assertAlmostEqual(row.log_error, fit.bse[name], places=8)
        figures = answer["figures"]
        self.assertEqual(figures["rows"], len(table))
        self.assertAlmostEqual(figures["dispersion"], fit.pearson_chi2 / fit.df_resid, places=8)
        self.assertAlmostEqual(figures["deviance"], fit.deviance, places=6)
        self.assertIn("pressure", json.dumps(answer["notes"]))  # the blank readings are told

    def test_spoken_lines_are_read_as_meant(self):
        heard = {
            "spoken": ([7], [1200]),
            "spoken pair": ([14, 5], [2300, 2100]),
            "spoken units": ([12, 7], [3400, 3100]),
            "spoken zero": ([0], [5000]),
        }
        for name, (count, exposure) in heard.items():
            with self.subTest(name):
                read_as = self.answer(name)["read_as"]["of"]
                as_list = lambda cell: cell if isinstance(cell, list) else [cell]  # noqa: E731
                self.assertEqual((as_list(read_as["count"]), as_list(read_as["exposure"])), (count, exposure))
        self.assertIn("bed-days", self.answer("spoken units")["say"])


class Script(unittest.TestCase):
    def test_it_answers_from_any_folder(self):
        with tempfile.TemporaryDirectory() as elsewhere:
            done = subprocess.run(
                ["sh", SAMPLES / "run.sh"],
                cwd=elsewhere,
                env={**os.environ, "COUNTSEL_ENGINE": ENGINE},
                capture_output=True,
                encoding="utf-8",
                timeout=120,
            )
        self.assertEqual((done.returncode, done.stderr), (0, ""))
        shown, wire = done.stdout.split("requests.jsonl\n", 1)
        for spoken in ("cast iron", "per 100", "pvc", "asbestos cement", "$ countsel ask what_drives"):
            self.assertIn(spoken, shown)
        asked = (SAMPLES / "requests.jsonl").read_text(encoding="utf-8")
        self.assertEqual(len(wire.splitlines()), len(asked.splitlines()))


if __name__ == "__main__":
    unittest.main()
