# tests/protocol/cells_test.py -- cells as hosts really send them (contract, section 3).
import unittest

from wire import WireTest, how_often

LARGEST = 2**53


class Cells(WireTest):
    def count(self, *cells, **rest):
        return how_often({"count": list(cells)}, **rest)

    # Blanks

    def test_a_blank_leaves_its_row_out_and_is_never_zero(self):
        for blank in (None, "", " ", " \t ", "\u00a0"):
            with self.subTest(blank=blank):
                answer = self.answer(how_often({"count": [1, blank, 5], "exposure": [10, 10, 10]}))
                self.assertEqual(answer["figures"]["count"], 6)
                self.assertEqual(answer["figures"]["exposure"], 20)
                self.assertEqual(answer["tables"]["rates"]["label"], ["1", "3"])
                note = self.note(answer, "blank")
                self.assertEqual(note["where"], [{"column": "count", "row": 2}])
                self.assertIn("1 row was left out", note["text"])

    def test_a_blank_in_whatever_the_question_uses(self):
        of = {"count": [1, 2, 3], "exposure": [1, 1, None], "group": [None, "a", "b"]}
        answer = self.answer(how_often(of))
        self.assertEqual(answer["figures"]["count"], 2)
        notes = [note for note in answer["notes"] if note["code"] == "blank"]
        self.assertEqual({note["where"][0]["column"] for note in notes}, {"exposure", "group"})
        of = {"columns": {"count": [1, 2, 3, 9], "age": [1, None, 5, 7], "unused": [None] * 4}}
        answer = self.answer({"ask": "what_drives", "of": of, "with": {"terms": ["age"]}})
        self.assertEqual(answer["figures"]["rows"], 3)

    def test_a_blank_label_keeps_its_row(self):
        answer = self.answer(how_often({"count": [1, 2, 4], "label": ["a", None, "c"]}))
        self.assertEqual(answer["figures"]["count"], 7)
        self.assertEqual(answer["tables"]["rates"]["label"], ["a", "", "c"])
        self.no_note(answer, "blank")

    def test_all_rows_blank(self):
        self.refused(self.count(None, None), "too_few")
        self.refused(self.count("", " "), "too_few")
        self.refused(how_often({"count": [1, None], "exposure": [None, 1]}), "too_few")
        self.refused(self.count(), "too_few", text="no rows")

    def test_many_blanks_are_counted_and_twenty_named(self):
        answer = self.answer(self.count(*[None] * 30, 1, 1))
        note = self.note(answer, "blank")
        self.assertEqual(len(note["where"]), 20)
        self.assertIn("30 rows were left out", note["text"])

    # Counts

    def test_counts_are_whole_from_0_to_2_to_the_53(self):
        self.assertEqual(self.answer(self.count(3.0))["figures"]["count"], 3)
        self.assertEqual(self.answer(self.count(3e0, 30e-1))["figures"]["count"], 6)
        self.assertEqual(self.answer(self.count(LARGEST))["figures"]["count"], LARGEST)
        for cell in (-1, 3.5, -0.5, 1e-300, LARGEST + 1, LARGEST + 2, 2**63, 2**64, 1e16, 1e300):
            with self.subTest(cell=cell):
                self.refused(self.count(1, cell), "bad_count", column="count", row=2)
        for line in ("9007199254740993.0", "9007199254740993", '"9007199254740993"', '"9007199254740993.0"'):
            with self.subTest(line):
                self.refused('{"ask":"how_often","of":{"count":[1,%s]}}' % line, "bad_count", column="count", row=2)

    def test_the_refusal_says_what_stands_there_and_how_often(self):
        refusal = self.refused(self.count(1, -2, 3), "bad_count", row=2)
        self.assertEqual(refusal["text"], "Row 2 of count is -2; a count is a whole number, 0 or more.")
        refusal = self.refused(self.count(*[-1] * 25), "bad_count", row=1, text="25")
        self.assertEqual([place["row"] for place in refusal["where"]], list(range(1, 21)))

    def test_a_sum_beyond_2_to_the_53_is_answered_with_a_note(self):
        answer = self.answer(self.count(LARGEST, LARGEST, 5))
        self.note(answer, "large_sum")

    # Exposures

    def test_exposures_are_above_0(self):
        for cell in (-1, -1e-300):
            self.refused(how_often({"count": [1, 1], "exposure": [1, cell]}), "bad_exposure", column="exposure", row=2)

    def test_an_exposure_of_0(self):
        answer = self.answer(how_often({"count": [1, 0, 5], "exposure": [10, 0, 10]}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["1", "3"])
        self.assertEqual(self.note(answer, "zero_exposure")["where"], [{"column": "exposure", "row": 2}])
        self.refused(
            how_often({"count": [1, 2], "exposure": [10, 0]}),
            "bad_exposure",
            column="exposure",
            row=2,
            text="the count there is 2",
        )
        self.refused(how_often({"count": [0, 0], "exposure": [0, 0]}), "too_few")

    def test_no_exposure_counts_each_row_as_1_and_says_so(self):
        answer = self.answer(self.count(3, 5))
        self.assertEqual(answer["figures"]["exposure"], 2)
        self.note(answer, "no_exposure")
        self.assertIn("No exposure was given", answer["say"])

    # Texts

    def test_text_that_is_a_number(self):
        answer = self.answer(
            how_often(
                {"count": ["12", " 3 ", 4], "exposure": ["1e3", "2.5", "\u22120"]} | {"exposure": ["1e3", "2.5", ".5"]}
            )
        )
        self.assertEqual(answer["figures"]["count"], 19)
        self.assertEqual(answer["figures"]["exposure"], 1003)
        notes = [note["text"] for note in answer["notes"] if note["code"] == "text_numbers"]
        self.assertEqual(len(notes), 2)
        self.assertIn("2 cells of count", notes[0])

    def test_text_that_is_no_number(self):
        for cell in (
            "x",
            "12a",
            "1 2",
            "--1",
            "1e",
            "0x10",
            "inf",
            "nan",
            "NA",
            "€5",
            "5%",
            ".",
            ",",
            "..",
            "-",
            "1e999",
        ):
            with self.subTest(cell=cell):
                self.refused(self.count(1, cell), "bad_type", column="count", row=2)

    def test_a_decimal_comma(self):
        self.refused(
            how_often({"count": [1], "exposure": ["3,5"]}), "bad_value", column="exposure", row=1, hint='"decimal":","'
        )
        self.refused(how_often({"count": [1], "exposure": ["0,125"]}), "bad_value", hint='"decimal":","')
        self.refused(how_often({"count": [1], "exposure": [",5"]}), "bad_value", hint='"decimal":","')
        answer = self.answer(how_often({"count": [1], "exposure": ["3,5"]}, **{"with": {"decimal": ","}}))
        self.assertEqual(answer["figures"]["exposure"], 3.5)

    def test_what_could_be_either(self):
        for cell in ("1,200", "1.200", "-1,200", "12,345", "123.456", "1,200,300", "1.200.300", "1,200.5", "1.200,5"):
            with self.subTest(cell=cell):
                self.refused(
                    how_often({"count": [1], "exposure": [cell]}), "bad_value", column="exposure", hint="decimal"
                )

    def test_the_options_settle_it(self):
        for cell, options, value in [
            ("1,200", {"thousands": ","}, 1200), ("1.200", {"thousands": ","}, 1.2), ("1,200.5", {"thousands": ","}, 1200.5),
            ("1,200", {"decimal": ","}, 1.2), ("1.200", {"decimal": ","}, 1200), ("1.200,5", {"decimal": ","}, 1200.5),
            ("1.200", {"thousands": "."}, 1200), ("1.200,5", {"thousands": "."}, 1200.5), ("1.234.567", {"thousands": "."}, 1234567),
            ("1,200", {"decimal": "."}, 1200), ("1.200", {"decimal": "."}, 1.2), ("1 200,5", {"decimal": ",", "thousands": " "}, 1200.5),
            ("1\u00a0200", {"thousands": " "}, 1200), ("1\u202f200.5", {"thousands": " "}, 1200.5), ("1'200", {"thousands": "'"}, 1200),
            ("1’200", {"thousands": "'"}, 1200), ("1200", {"thousands": ","}, 1200), ("12", {"decimal": ","}, 12),
        ]:  # fmt: skip
            with self.subTest(cell=cell, options=options):
                answer = self.answer(how_often({"count": [1], "exposure": [cell]}, **{"with": options}))
                self.assertEqual(answer["figures"]["exposure"], value)

    def test_thousands_marks_at_odd_places(self):
        for cell in ("12,00", "1,2,3", "1200,300", ",200", "1,,200", "1,200,"):
            with self.subTest(cell=cell):
                request = how_often({"count": [1], "exposure": [cell]}, **{"with": {"thousands": ","}})
                self.refused(request, "bad_value", column="exposure")

    def test_one_mark_for_both_is_refused(self):
        for mark in (",", "."):
            request = self.count("1", **{"with": {"decimal": mark, "thousands": mark}})
            self.refused(request, "bad_value", text="decimal")

    # Booleans, levels

    def test_a_boolean_is_a_level_never_a_number(self):
        self.refused(self.count(1, True), "bad_type", column="count", row=2)
        answer = self.answer(how_often({"count": [1, 2, 4], "group": [True, False, True]}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["true", "false"])

    def test_levels_as_text(self):
        answer = self.answer(how_often({"count": [1, 2, 4, 8], "group": [95.0, "95", 95, 0.5]}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["95", "0.5"])
        self.assertEqual(answer["tables"]["rates"]["count"], [7, 8])
        answer = self.answer(how_often({"count": [1, 2], "label": [1e21, -0.0]}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["1e+21", "0"])

    def test_numbers_and_texts_are_levels_where_levels_are_asked_for(self):
        answer = self.answer(how_often({"count": [1, 2, 4], "group": [1, "x", True]}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["1", "x", "true"])
        self.refused(self.count(1, "x"), "bad_type", column="count", row=2, hint="numbers and texts")

    def test_rows_keep_the_order_of_first_appearance(self):
        answer = self.answer(how_often({"count": [1, 2, 4, 8], "group": ["z", "a", "z", "m"]}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["z", "a", "m"])

    # Error cells

    def test_error_cells(self):
        for error in (
            "#N/A", "#DIV/0!", "#REF!", "#VALUE!", "#NAME?", "#NUM!", "#NULL!", "#SPILL!", "#ERROR!", "Err:502", "#BEZUG!", "#NV",
            "#¡VALOR!", "#GETTING_DATA",
        ):  # fmt: skip
            with self.subTest(error):
                self.refused(self.count(1, error), "error_cell", column="count", row=2, text=error)
                self.refused(how_often({"count": [1, 2], "group": ["a", error]}), "error_cell", column="group", row=2)
        for no_error in ("#5", "#", "#hash!", "Err:x", "No. #1!"):
            self.answer(how_often({"count": [1, 2], "label": ["a", no_error]}))

    def test_error_cells_skipped(self):
        answer = self.answer(self.count(1, "#N/A", 4, **{"with": {"error_cells": "skip"}}))
        self.assertEqual(answer["figures"]["count"], 5)
        self.assertEqual(self.note(answer, "error_cell")["where"], [{"column": "count", "row": 2}])

    def test_an_error_cell_that_the_question_does_not_read(self):
        self.answer(how_often({"columns": {"count": [1, 2], "other": ["#N/A", 1]}}))
        self.answer(how_often({"count": [1, "#N/A", 4], "group": ["a", "b", "a"], "only": {"group": "a"}}))

    # Lengths

    def test_lengths(self):
        refusal = self.refused(how_often({"count": [1, 2, 3], "exposure": [1, 2]}), "length_mismatch")
        self.assertEqual(refusal["text"], "count has 3 rows and exposure has 2 rows; they should have as many.")
        self.assertEqual([place["column"] for place in refusal["where"]], ["count", "exposure"])
        self.refused(how_often({"count": [1], "exposure": 2, "label": []}), "length_mismatch", text="label has 0 rows")
        of = {"range": [["count", "exposure"], [1, 2], [3], [4, 5, 6]]}
        self.refused(how_often(of), "length_mismatch", row=2, text="Row 2 has 1 cell and the first row has 2 cells")


if __name__ == "__main__":
    unittest.main()
