# tests/protocol/rates_cases_a_test.py -- counts on target, several groups and climbs, by wire.
#
# Gathered cases (tests/reference/rates/cases_*.json) are held to their published and recomputed values; what no
# publication has is held to exact fractions, to sums over all outcomes or to SciPy, worked out here.
import itertools
import math
import unittest

import numpy
from rates_cases_b_test import Cases, ask_all, cases
from scipy import stats

NONSMOKERS = "I-doctors-age-trend"


def case_of(name, one):
    (found,) = cases(name, one)
    return found


def answer_of(ask, of, **options):
    (reply,) = ask_all([{"ask": ask, "of": of, "with": options}])
    assert "answer" in reply, reply
    return reply["answer"]


class OnTarget(Cases):
    def test_published_ratios(self):
        for case in cases("cases_expected.json"):
            inputs = case["inputs"]

            def check(answer, case=case):
                figures, table = answer["figures"], answer["tables"]["comparison"]
                for figure, key in (("ratio", "ratio"), ("low", "lower"), ("high", "upper")):
                    self.holds(figures[figure], case, key)
                    self.assertEqual(table[figure], [figures[figure]])
                self.holds(figures["p_value"], case, "p_two_sided")
                self.assertEqual(table["p_adjusted"], table["p_value"])

            of = {"count": inputs["observed"], "expected": inputs["expected"]}
            # Byar's were recomputed with 1.96: the level that belongs to it.
            byar = "byar" in case["id"]
            confidence = 1 - 2 * stats.norm.sf(1.96) if byar else inputs["confidence"]
            self.ask(case, "on_target", of, check, confidence=confidence, limits="byar" if byar else "exact")
        self.run_all()

    def test_a_target_is_an_expected_number(self):
        """A target per `per`, by role and by option, gives what its expected number gives."""
        of = {"count": [12, 3], "exposure": [1500, 800]}
        expected = answer_of("on_target", of | {"expected": [6, 3.2]}, per=1000)
        for other, options in (({"target": [4, 4]}, {}), ({}, {"target_rate": 4})):
            got = answer_of("on_target", of | other, per=1000, **options)
            self.assertEqual(got["figures"], expected["figures"])
            self.assertEqual(got["tables"], expected["tables"])

    def test_a_past_in_doubt_is_a_second_count(self):
        """Conditional on both counts (Przyborowski and Wilenski 1940): beta quantiles by SciPy."""
        figures = answer_of("on_target", {"count": 14, "exposure": 2300, "past_count": 31, "past_exposure": 8700})[
            "figures"
        ]
        low, high = stats.beta.ppf(0.025, 14, 32), stats.beta.ppf(0.975, 15, 31)
        for key, share in (("low", low), ("high", high)):
            self.assertAlmostEqual(figures[key], share / (1 - share) * 8700 / 2300, delta=1e-11 * figures[key])
        tail = stats.binom.sf(13, 45, 2300 / 11000)
        self.assertAlmostEqual(figures["p_value"], 2 * tail, delta=1e-12)

    def test_p_values_of_rows_are_adjusted(self):
        counts, expected = [20, 3, 9, 1], [8.0, 3.5, 7.25, 6.0]
        for adjust in ("holm", "bh"):
            table = answer_of("on_target", {"count": counts, "expected": expected}, adjust=adjust)["tables"][
                "comparison"
            ]
            p = numpy.array(table["p_value"])
            for one, count, mean in zip(p, counts, expected):
                exact = min(1, 2 * min(stats.poisson.sf(count - 1, mean), stats.poisson.cdf(count, mean)))
                self.assertAlmostEqual(one, exact, delta=1e-12)
            order = numpy.argsort(p)
            if adjust == "holm":
                steps = numpy.minimum(1, numpy.maximum.accumulate((len(p) - numpy.arange(len(p))) * p[order]))
            else:
                steps = numpy.minimum.accumulate((len(p) / numpy.arange(1, len(p) + 1) * p[order])[::-1])[::-1]
            numpy.testing.assert_allclose(numpy.array(table["p_adjusted"])[order], steps, rtol=1e-12)


class Groups(Cases):
    def test_pearson(self):
        case = case_of("cases_trend.json", NONSMOKERS)
        of = {"count": case["inputs"]["counts"], "exposure": case["inputs"]["exposures"], "group": list("abcde")}

        def check(answer, case=case):
            self.holds(answer["figures"]["statistic"], case, "heterogeneity_chi2")
            self.assertEqual(answer["figures"]["df"], case["recomputed"]["heterogeneity_df"])

        self.ask(case, "do_they_differ", of, check, test="pearson")
        self.run_all()

    def test_likelihood_ratio(self):
        counts, exposures = [14, 5, 9, 30], [2300, 2100, 1900, 2500]
        figures = answer_of("do_they_differ", {"count": counts, "exposure": exposures, "group": list("abcd")})[
            "figures"
        ]
        rate = sum(counts) / sum(exposures)
        statistic = 2 * sum(y * math.log(y / (e * rate)) for y, e in zip(counts, exposures))
        self.assertAlmostEqual(figures["statistic"], statistic, delta=1e-10)
        self.assertAlmostEqual(figures["p_value"], stats.chi2.sf(statistic, 3), delta=1e-13)

    def test_exact_over_all_outcomes(self):
        """The chance of a likelihood ratio at least as large, summed over every way to share 7 events out."""
        counts, exposures = [5, 0, 2], [4, 3, 5]
        total = sum(exposures)

        def distance(outcome):
            return 2 * sum(y * math.log(y * total / (7 * e)) for y, e in zip(outcome, exposures) if y)

        chance = 0.0
        for outcome in itertools.product(range(8), repeat=3):
            if sum(outcome) == 7 and distance(outcome) >= distance(counts) - 1e-9:
                chance += stats.multinomial.pmf(outcome, 7, [e / total for e in exposures])
        of = {"count": counts, "exposure": exposures, "group": list("abc")}
        figures = answer_of("do_they_differ", of, test="simulated")["figures"]
        self.assertAlmostEqual(figures["p_value"], chance, delta=1e-12)

    def test_a_simulation_comes_near_and_repeats(self):
        of = {"count": [30, 22, 31, 25, 25, 20], "exposure": [40, 35, 50, 30, 35, 40], "group": list("abcdef")}
        first, again = (answer_of("do_they_differ", of, test="simulated", draws=20000) for _ in range(2))
        self.assertEqual(first, again)
        other = answer_of("do_they_differ", of, test="simulated", draws=20000, seed=5)["figures"]
        law = answer_of("do_they_differ", of)["figures"]["p_value"]
        for figures in (first["figures"], other):
            # Chi-square is itself only near: 5 degrees of freedom and expected counts about 25.
            self.assertLess(abs(figures["p_value"] - law), 5 * figures["p_error"] + 0.01)
        self.assertNotEqual(first["figures"]["p_value"], other["p_value"])

    def test_pairs(self):
        counts, exposures = [14, 5, 9], [2300, 2100, 1900]
        of = {"count": counts, "exposure": exposures, "group": list("abc")}
        pairs = answer_of("do_they_differ", of)["tables"]["pairs"]
        self.assertEqual(list(zip(pairs["first"], pairs["second"])), [("a", "b"), ("a", "c"), ("b", "c")])
        for i, (one, two) in enumerate(((0, 1), (0, 2), (1, 2))):
            figures = answer_of(
                "which_higher",
                {
                    "count": [counts[one], counts[two]],
                    "exposure": [exposures[one], exposures[two]],
                    "group": ["x", "y"],
                },
            )["figures"]
            self.assertEqual(
                [pairs[key][i] for key in ("ratio", "low", "high", "p_value")],
                [figures[key] for key in ("ratio", "ratio_low", "ratio_high", "p_value")],
            )
        against = answer_of("do_they_differ", of, reference="b")["tables"]["pairs"]
        self.assertEqual(list(zip(against["first"], against["second"])), [("a", "b"), ("c", "b")])


class Climb(Cases):
    def test_score_test(self):
        case = case_of("cases_trend.json", NONSMOKERS)
        inputs = case["inputs"]
        of = {"count": inputs["counts"], "exposure": inputs["exposures"], "order": inputs["scores"]}
        self.ask(
            case, "does_it_climb", of, lambda answer: self.holds(answer["figures"]["statistic"], case, "trend_chi2")
        )
        # Texts in order count as 1, 2, 3, 4, 5.
        ages = ["35-44", "45-54", "55-64", "65-74", "75-84"]
        self.ask(
            case,
            "does_it_climb",
            of | {"order": ages},
            lambda answer: self.holds(answer["figures"]["statistic"], case, "trend_chi2"),
        )
        self.run_all()

    def test_slope(self):
        case = case_of("cases_trend.json", "I-coal-trend")
        counts = case["inputs"]["counts"]

        def check(answer, case=case):
            figures, recomputed = answer["figures"], case["recomputed"]
            self.holds(figures["log_ratio"], case, "slope_per_year", 1e-9)
            self.holds(figures["ratio"], case, "ratio_per_year", 1e-10)
            z = stats.norm.ppf(0.975)
            self.assertAlmostEqual(
                math.log(figures["high"]), recomputed["slope_per_year"] + z * recomputed["slope_se"], delta=1e-9
            )
            self.assertAlmostEqual(math.sqrt(figures["statistic"]), -recomputed["score_test_z"], delta=1e-9)
            self.holds(figures["departure_statistic"], case, "deviance", 1e-10)
            self.assertEqual(figures["departure_df"], len(counts) - 2)

        self.ask(
            case,
            "does_it_climb",
            {"count": counts, "order": list(range(1851, 1851 + len(counts)))},
            check,
            limits="wald",
        )
        self.run_all()

    def test_rows_of_one_step_are_added_up(self):
        apart = {"count": [9, 4, 7, 16, 21], "exposure": [310, 100, 200, 305, 290], "order": [1, 2, 2, 3, 5]}
        whole = {"count": [21, 9, 11, 16], "exposure": [290, 310, 300, 305], "order": [5, 1, 2, 3]}
        one, two = answer_of("does_it_climb", apart), answer_of("does_it_climb", whole)
        self.assertEqual(one["figures"], two["figures"])
        self.assertEqual(one["tables"], two["tables"])


if __name__ == "__main__":
    unittest.main()
