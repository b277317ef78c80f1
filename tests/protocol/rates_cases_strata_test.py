# tests/protocol/rates_cases_strata_test.py -- one mix for all, comparisons within strata, rate and mix apart, by wire.
#
# Gathered cases (tests/reference/rates/cases_strata.json) are held to their published and recomputed values; what
# no publication has is held to exact fractions or to sums over all outcomes, worked out here.
import json
import math
import unittest
from fractions import Fraction

import numpy
from rates_cases_a_test import answer_of, case_of
from rates_cases_b_test import REFERENCE, Cases, cases
from scipy import stats


def doctors():
    """Both groups of B-mh-doctors as rows: smokers first, then the others."""
    inputs = case_of("cases_strata.json", "B-mh-doctors")["inputs"]
    return {
        "count": inputs["events_exposed"] + inputs["events_unexposed"],
        "exposure": inputs["time_exposed"] + inputs["time_unexposed"],
        "stratum": inputs["age"] * 2,
        "group": ["smokers"] * 5 + ["others"] * 5,
    }


class OneMix(Cases):
    def test_direct(self):
        for case in cases("cases_strata.json", "B-dsr"):
            inputs = case["inputs"]
            of = {"count": inputs["events"], "exposure": inputs["population"], "stratum": inputs["strata"]}
            for method, low, high in (
                ("gamma", "gamma_lower", "gamma_upper"),
                ("dobson", "dobson_exact_lower", "dobson_exact_upper"),
            ):

                def check(answer, case=case, low=low, high=high):
                    figures = answer["figures"]
                    self.holds(figures["crude_rate"], case, "crude_per_100000")
                    self.holds(figures["adjusted_rate"], case, "rate_per_100000")
                    self.holds(figures["low"], case, low)
                    self.holds(figures["high"], case, high)

                self.ask(case, "same_mix", of | {"weight": inputs["standard"]}, check, limits=method, per=100000)
        self.run_all()

    def test_indirect(self):
        for case in cases("cases_strata.json", "B-indirect"):
            inputs = case["inputs"]
            per = 1000
            of = {
                "count": inputs["events_exposed"],
                "exposure": inputs["time_exposed"],
                "stratum": list("abcde"),
                "standard_rate": [y / t * per for y, t in zip(inputs["reference_events"], inputs["reference_time"])],
                "standard_exposure": inputs["reference_time"],
            }
            crude = sum(inputs["reference_events"]) / sum(inputs["reference_time"]) * per

            def check(answer, case=case, crude=crude):
                figures = answer["figures"]
                self.holds(figures["count"], case, "observed")
                self.holds(figures["expected"], case, "expected")
                self.holds(figures["ratio"], case, "ratio")
                self.holds(figures["ratio_low"], case, "lower")
                self.holds(figures["ratio_high"], case, "upper")
                self.assertAlmostEqual(figures["adjusted_rate"], figures["ratio"] * crude, delta=1e-10)

            self.ask(case, "same_mix", of, check, way="indirect", per=per, confidence=inputs["confidence"])
        self.run_all()

    def test_rates_of_two_groups(self):
        """Down syndrome again, two orders of birth at once: their adjusted rates divided."""
        one, two = case_of("cases_strata.json", "B-dsr-down-1"), case_of("cases_strata.json", "B-dsr-down-4")
        of = {
            key: one["inputs"][source] + two["inputs"][source]
            for key, source in (
                ("count", "events"),
                ("exposure", "population"),
                ("stratum", "strata"),
                ("weight", "standard"),
            )
        }
        answer = answer_of("same_mix", of | {"group": ["first"] * 6 + ["fourth"] * 6}, per=100000, reference="first")
        table = answer["tables"]["adjusted"]
        for i, case in enumerate((one, two)):
            self.holds(table["adjusted_rate"][i], case, "rate_per_100000")
        self.assertEqual(answer["figures"], {})
        self.assertEqual(table["ratio"][0], 1)
        self.assertEqual([table["ratio_low"][0], table["ratio_high"][0]], [None, None])
        self.assertAlmostEqual(
            table["ratio"][1], two["recomputed"]["rate_per_100000"] / one["recomputed"]["rate_per_100000"], delta=1e-11
        )
        self.assertTrue(table["ratio_low"][1] < 1 < table["ratio_high"][1])
        # Crude rates differ twofold: the note says that adjusted ones do not, in the ratio's direction or not.
        self.assertGreater(table["crude_rate"][1] / table["crude_rate"][0], 2)

    def test_weights_count_by_proportion(self):
        of = {"count": [3, 9], "exposure": [520, 310], "stratum": ["pvc", "iron"]}
        small, large = (answer_of("same_mix", of | {"weight": weights}) for weights in ([0.25, 0.75], [100, 300]))
        for key in ("adjusted_rate", "low", "high"):
            self.assertAlmostEqual(small["figures"][key], large["figures"][key], delta=1e-14)
        self.assertIn("weights_scaled", [note["code"] for note in large["notes"]])
        self.assertNotIn("weights_scaled", [note["code"] for note in small["notes"]])
        self.assertAlmostEqual(large["figures"]["expected"], 100 * 3 / 520 + 300 * 9 / 310, delta=1e-12)


class Within(Cases):
    def test_mantel_haenszel(self):
        case = case_of("cases_strata.json", "B-mh-doctors")

        def check(answer, case=case):
            figures, strata = answer["figures"], answer["tables"]["strata"]
            for figure, key in (
                ("ratio", "mh_ratio"),
                ("low", "mh_lower"),
                ("high", "mh_upper"),
                ("statistic", "mh_chi2"),
                ("crude_ratio", "crude_ratio"),
            ):
                self.holds(figures[figure], case, key)
            self.assertEqual(figures["homogeneity_df"], case["recomputed"]["heterogeneity_df"])
            # By the likelihood ratio here, about Mantel and Haenszel's ratio there: near, not the same.
            self.assertLess(abs(figures["homogeneity_p"] - case["recomputed"]["heterogeneity_p"]), 0.01)
            numpy.testing.assert_allclose(strata["ratio"], case["recomputed"]["stratum_ratios"], rtol=1e-11)
            self.assertAlmostEqual(sum(strata["weight"]), 1, delta=1e-12)

        self.ask(case, "within_strata", doctors(), check)
        for limits in ("likelihood", "exact"):
            self.ask(
                case,
                "within_strata",
                doctors(),
                lambda answer, case=case: self.holds(answer["figures"]["ratio"], case, "ml_ratio"),
                limits=limits,
            )
        self.run_all()

    def test_homogeneity_is_the_likelihood_ratio(self):
        answer = answer_of("within_strata", doctors(), limits="likelihood")
        ratio, of = answer["figures"]["ratio"], doctors()
        statistic = 0.0
        for one in range(5):
            y1, y0, t1, t0 = of["count"][one], of["count"][one + 5], of["exposure"][one], of["exposure"][one + 5]
            rate = (y1 + y0) / (t1 * ratio + t0)
            statistic += 2 * (y1 * math.log(y1 / (t1 * ratio * rate)) + y0 * math.log(y0 / (t0 * rate)))
        self.assertAlmostEqual(answer["figures"]["homogeneity_statistic"], statistic, delta=1e-9)
        self.assertAlmostEqual(answer["figures"]["homogeneity_p"], stats.chi2.sf(statistic, 4), delta=1e-12)

    def test_exact_limits_over_all_outcomes(self):
        """Two small strata: the tails of the sum of two binomials are 2.5 % at the limits (Martin and Austin 1996)."""
        of = {
            "count": [4, 3, 1, 2],
            "exposure": [10, 30, 20, 25],
            "group": ["a", "a", "b", "b"],
            "stratum": ["x", "y"] * 2,
        }
        figures = answer_of("within_strata", of, limits="exact")["figures"]

        def tail(ratio, at_least):
            one, two = 10 * ratio / (10 * ratio + 20), 30 * ratio / (30 * ratio + 25)
            return sum(
                stats.binom.pmf(i, 5, one) * stats.binom.pmf(j, 5, two)
                for i in range(6)
                for j in range(6)
                if (i + j >= 7) == at_least or i + j == 7
            )

        self.assertAlmostEqual(tail(figures["low"], True), 0.025, delta=1e-10)
        self.assertAlmostEqual(tail(figures["high"], False), 0.025, delta=1e-10)

    def test_difference(self):
        of = doctors()
        figures = answer_of("within_strata", of, measure="difference", per=1000)["figures"]
        above = below = 0.0
        for i in range(5):
            t1, t0 = of["exposure"][i], of["exposure"][i + 5]
            above += (of["count"][i] * t0 - of["count"][i + 5] * t1) / (t1 + t0)
            below += t1 * t0 / (t1 + t0)
        self.assertAlmostEqual(figures["difference"], 1000 * above / below, delta=1e-11)
        self.assertNotIn("ratio", figures)


class Split(unittest.TestCase):
    COUNT, EXPOSURE = [30, 42, 18, 60], [3000, 1400, 2600, 2500]

    def test_parts_add_up_exactly(self):
        """Kitagawa's split in fractions; each stratum's mix part less its gain times the mean crude rate."""
        of = {
            "count": self.COUNT,
            "exposure": self.EXPOSURE,
            "stratum": ["day", "night"] * 2,
            "group": ["new", "new", "old", "old"],
        }
        answer = answer_of("rate_or_mix", of, per=1000)
        y, t = ([Fraction(v) for v in values] for values in (self.COUNT, self.EXPOSURE))
        crude = [(y[0] + y[1]) / (t[0] + t[1]), (y[2] + y[3]) / (t[2] + t[3])]
        rates, mixes = [], []
        for s in range(2):
            share1, share0 = t[s] / (t[0] + t[1]), t[s + 2] / (t[2] + t[3])
            rate1, rate0 = y[s] / t[s], y[s + 2] / t[s + 2]
            rates.append((rate1 - rate0) * (share1 + share0) / 2)
            mixes.append((share1 - share0) * ((rate1 + rate0) / 2 - sum(crude) / 2))
        self.assertEqual(sum(rates) + sum(mixes), crude[0] - crude[1])
        table, figures = answer["tables"]["strata"], answer["figures"]
        numpy.testing.assert_allclose(table["rate_part"], [float(1000 * r) for r in rates], rtol=1e-12)
        numpy.testing.assert_allclose(table["mix_part"], [float(1000 * m) for m in mixes], rtol=1e-12)
        self.assertAlmostEqual(figures["difference"], figures["rate_part"] + figures["mix_part"], delta=1e-12)
        self.assertAlmostEqual(figures["difference"], float(1000 * (crude[0] - crude[1])), delta=1e-12)

    def test_normal_limits(self):
        """Counts Poisson, exposures fixed: the variance of a sum of coefficients times counts."""
        of = {
            "count": self.COUNT,
            "exposure": self.EXPOSURE,
            "stratum": ["day", "night"] * 2,
            "group": ["new", "new", "old", "old"],
        }
        figures = answer_of("rate_or_mix", of, limits="normal")["figures"]
        t = self.EXPOSURE
        share = [t[0] / (t[0] + t[1]), t[1] / (t[0] + t[1]), t[2] / (t[2] + t[3]), t[3] / (t[2] + t[3])]
        rate = mix = 0.0
        for i in range(4):
            other = (i + 2) % 4
            rate += self.COUNT[i] * ((share[i] + share[other]) / 2 / t[i]) ** 2
            mix += self.COUNT[i] * ((share[i] - share[other]) / 2 / t[i]) ** 2
        z = stats.norm.ppf(0.975)
        for part, variance in (("rate", rate), ("mix", mix)):
            half = z * math.sqrt(variance)
            self.assertAlmostEqual(figures[part + "_high"] - figures[part + "_part"], half, delta=1e-13)
            self.assertAlmostEqual(figures[part + "_part"] - figures[part + "_low"], half, delta=1e-13)


class Present(unittest.TestCase):
    def test_every_case_says_where_it_comes_from(self):
        for name in ("cases_expected.json", "cases_strata.json", "cases_trend.json"):
            for case in json.loads((REFERENCE / name).read_text()):
                self.assertTrue(case["source"], case["id"])
                self.assertTrue(case["expected"] or case["recomputed"], case["id"])


if __name__ == "__main__":
    unittest.main()
