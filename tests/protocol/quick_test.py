# tests/protocol/quick_test.py -- lines as spoken in a meeting, and the requests they are read as.
import unittest

from wire import WireTest


class Quick(WireTest):
    def quick(self, line, **rest):
        return {"ask": "quick", "of": {"line": line}, **rest}

    def read(self, line):
        return self.answer(self.quick(line))["read_as"]

    def test_what_it_reads(self):
        for line, ask, of, options in [
            ("7", "how_often", {"count": 7}, {}),
            ("7 falls", "how_often", {"count": 7}, {}),
            ("7 in 1200", "how_often", {"count": 7, "exposure": 1200}, {"per": 1000}),
            ("7 in 1200 per 1000", "how_often", {"count": 7, "exposure": 1200}, {"per": 1000}),
            ("7 in 1200 per 1,000 at 90%", "how_often", {"count": 7, "exposure": 1200}, {"per": 1000, "confidence": 0.9}),
            ("0 in 5000 at 90%", "how_often", {"count": 0, "exposure": 5000}, {"confidence": 0.9}),
            ("7 out of 1200", "how_often", {"count": 7, "exposure": 1200}, {}),
            ("7 over 12.5", "how_often", {"count": 7, "exposure": 12.5}, {}),
            ("7/1200", "how_often", {"count": 7, "exposure": 1200}, {}),
            ("7 / .5", "how_often", {"count": 7, "exposure": 0.5}, {"per": 1}),
            ("1,234 in 1,234,567.5", "how_often", {"count": 1234, "exposure": 1234567.5}, {}),
            ("12 in 1e6", "how_often", {"count": 12, "exposure": 1000000}, {"per": 100000}),
            ("14 in 2300 vs 5 in 2100", "which_higher", {"count": [14, 5], "exposure": [2300, 2100]}, {"reference": "the second"}),
            ("14 in 2,300 versus 5 in 2,100 per 100", "which_higher", {"count": [14, 5], "exposure": [2300, 2100]}, {"per": 100}),
            ("14 in 2300 against 5 in 2100", "which_higher", {"count": [14, 5], "exposure": [2300, 2100]}, {}),
            ("12 falls / 3,400 bed-days vs 7 / 3,100", "which_higher", {"count": [12, 7], "exposure": [3400, 3100]}, {}),
            ("14 in 2300 vs 5 in 2100, is it different?", "which_higher", {"count": [14, 5], "exposure": [2300, 2100]}, {}),
            ("14 in 2300 vs 5 in 2100 Is It Different", "which_higher", {"count": [14, 5], "exposure": [2300, 2100]}, {}),
            ("14 In 2300 VS 5 in 2100, at 99.9%.", "which_higher", {"count": [14, 5], "exposure": [2300, 2100]}, {"confidence": 0.999}),
        ]:  # fmt: skip
            with self.subTest(line):
                read = self.read(line)
                self.assertEqual(read["ask"], ask)
                for role, value in of.items():
                    self.assertEqual(read["of"][role], value)
                for option, value in options.items():
                    self.assertEqual(read["with"][option], value)

    def test_the_answer_is_that_of_the_request_it_was_read_as(self):
        for line in ("7 in 1200 per 1000", "12 falls / 3,400 bed-days vs 7 / 3,100", "0 in 5000 at 90%"):
            answer = self.answer(self.quick(line, id=5))
            same = self.answer(answer["read_as"])
            self.assertEqual({part: answer[part] for part in same}, same)

    def test_the_sentence_reads_back_as_the_same_request(self):
        for line in (
            "7", "7 falls", "1 fall in 3 bed-days", "7 in 1200", "12 falls / 3,400 bed-days vs 7 / 3,100 at 90%", "3 in 1234567.25 per 1000000",
            "0 in 5000 at 99.9%", "7 in 0.002", "14 in 2300 vs 5 in 2100 per 7", "2 bursts in 90 km-years per 100 km-years", "5 in 2 vs 0 in 3e9",
        ):  # fmt: skip
            with self.subTest(line):
                answer = self.answer(self.quick(line))
                again = self.answer(self.quick(answer["sentence"]))
                self.assertEqual(again["read_as"], answer["read_as"], answer["sentence"])
                self.assertEqual(again["sentence"], answer["sentence"])

    def test_without_a_base_one_that_shows_digits_is_chosen_and_said(self):
        for line, per in (
            ("7 in 1200", 1000),
            ("14 in 2300 vs 5 in 2100", 1000),
            ("3 in 2", 1),
            ("1 in 1e9", 1e9),
            ("0 in 5000", 10_000),
        ):
            answer = self.answer(self.quick(line))
            self.assertEqual(answer["read_as"]["with"]["per"], per)
            self.assertEqual(answer["base_chosen"], per)
            self.assertIn("per " + format(int(per), ","), answer["sentence"]) if per > 1 else None
        self.assertNotIn("base_chosen", self.answer(self.quick("7 in 1200 per 10")))

    def test_words_travel(self):
        answer = self.answer(self.quick("12 falls in 3,400 bed-days"))
        self.assertEqual(answer["read_as"]["words"], {"events": "falls", "exposure": "bed-days"})
        self.assertIn("12 falls in 3,400 bed-days: 3.5 falls per 1,000 bed-days", answer["say"])
        self.assertEqual(answer["heads"]["rates"]["rate"], "falls per 1,000 bed-days")
        answer = self.answer(self.quick("1 fall in 100 bed-days vs 3 falls in 90"))
        self.assertEqual(answer["read_as"]["words"], {"events": "falls", "exposure": "bed-days"})
        answer = self.answer(self.quick("12 in 3400 per bed-day"))
        self.assertEqual(answer["read_as"]["words"], {"exposure": "bed-days"})
        answer = self.answer(self.quick("12 falls / 3,400 bed-days per 1000 bed-days"))
        self.assertEqual(answer["read_as"]["words"]["exposure"], "bed-days")
        answer = self.answer(self.quick("12 falls / 3,400 bed-days per bed-day"))
        self.assertEqual(answer["read_as"]["words"]["exposure"], "bed-days")

    def test_words_said_outright_go_first(self):
        answer = self.answer(self.quick("12 falls in 3400", words={"events": "slips", "exposure": "days"}))
        self.assertIn("12 slips in 3,400 days", answer["say"])
        self.refused(self.quick("12 in 3400", words={"evnts": "x"}), "unknown_key")
        self.refused(self.quick("12 in 3400", words={"events": 5}), "bad_type")

    def test_the_other_keys_of_a_request_hold(self):
        reply = self.ask(self.quick("7 in 1200", id="a", want=["say"]))
        self.assertEqual(list(reply), ["id", "ask", "answer"])
        self.assertEqual((reply["id"], reply["ask"]), ("a", "quick"))
        self.assertEqual(list(reply["answer"]), ["say", "read_as", "sentence", "base_chosen"])
        self.refused(self.quick("7 in 1200", want=["x"]), "bad_value")

    def test_two_units_in_one_comparison_are_refused(self):
        for line in (
            "12 falls / 3,400 bed-days vs 7 / 3,100 hours", "12 falls in 9 days vs 7 slips in 9 days", "7 in 1200 km per 1000 miles",
        ):  # fmt: skip
            with self.subTest(line):
                self.refused(self.quick(line), "bad_value", text="two different")

    def test_what_it_cannot_read_is_refused_with_an_example_that_works(self):
        for line in (
            "", "  ", "?", "falls", "in 1200", "7 in", "7 in x", "7 in 1200 per 0", "7 in 1200 at 90", "7 in 1200 at 0%", "7 in 1200 at 100%",
            "7 in 1200 in 3", "7 in 1200 vs", "7 vs 5 in 100", "7 in 100 vs 5", "1 in 2 vs 3 in 4 vs 5 in 6", "-7 in 100", "7 in -100", "7 + 5", "7 in 1200 per 5 per 7",
            "3,5 in 1200", "7 in 12,00", "7 out 1200", "$7", "7 in 1e999", "7 in 1200 blah 5", "7 vs 5", "é", "7 in 1200 per 1000 9",
        ):  # fmt: skip
            with self.subTest(line):
                refusal = self.refused(self.quick(line), "bad_value")
                self.assertTrue(refusal["hint"])
                if 'like "' in refusal["hint"]:
                    self.answer(self.quick(refusal["hint"].split('"')[1]))
        self.refused(self.quick("3,5 in 1200"), "bad_value", hint="3.5")

    def test_numbers_that_no_count_or_exposure_can_be(self):
        self.refused(self.quick("3.5 in 1200"), "bad_count")
        self.refused(self.quick("3 in 0"), "bad_exposure")
        self.refused(self.quick("0 in 0"), "too_few")

    def test_what_is_no_line(self):
        self.refused({"ask": "quick"}, "missing", text="line")
        self.refused({"ask": "quick", "of": {}}, "missing", text="line")
        for value in (5, True, ["7"], {"a": 1}):
            self.refused({"ask": "quick", "of": {"line": value}}, "bad_type", text="line")


if __name__ == "__main__":
    unittest.main()
