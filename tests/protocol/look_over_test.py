# tests/protocol/look_over_test.py -- the audit of a table, asked for and unasked.
import json
import time
import unittest

from wire import WireTest, exchange

MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug"]
DAYS = [1210, 1130, 1190, 1205, 1220, 1180, 1240, 1195]
FALLS = [3, 4, 5, 4, 2, 6, 0, 3]


class LookOver(WireTest):
    def findings(self, of, **options):
        answer = self.answer({"ask": "look_over", "of": of, "with": options})
        table = answer["tables"]["findings"]
        self.assertEqual(list(table), ["kind", "column", "row", "cell", "text", "what_to_do"])
        self.assertEqual(answer["figures"]["findings"], len(table["kind"]))
        return [dict(zip(table, row)) for row in zip(*table.values())], answer

    def kinds(self, of, **options):
        return [(one["kind"], one["column"], one["row"]) for one in self.findings(of, **options)[0]]

    def test_a_sound_table_has_no_findings(self):
        found, answer = self.findings({"label": MONTHS, "count": FALLS, "exposure": DAYS})
        self.assertEqual(found, [])
        self.assertIn("nothing stands out", answer["say"])

    def test_kinds_blanks_and_zeros_are_told_apart(self):
        columns = self.findings({"columns": {"ward": ["a", None, "c"], "falls": [0, None, "7"], "note": [1, "x", True]}})[
            1]["tables"]["columns"]
        self.assertEqual(columns["kind"], ["levels", "numbers and texts", "numbers and texts"])
        self.assertEqual(columns["blanks"], [1, 1, 0])
        self.assertEqual(columns["zeros"], [0, 1, 0])
        self.assertEqual(columns["text_numbers"], [0, 1, 0])
        self.assertEqual(columns["least"], [None, 0, 1])

    def test_single_cells(self):
        of = {"count": [3, None, "4", "#N/A", -2, True, "n/a", "1,200", "3,5", 2.5],
              "exposure": [10, 0, 12, 11, -4, 10, 10, 10, 10, 10]}
        kinds = self.kinds(of)
        for expected in [("error_cell", "count", 4), ("blank", "count", 2), ("text_number", "count", 3),
                         ("ambiguous_number", "count", 8), ("decimal_comma", "count", 9),
                         ("text_among_numbers", "count", 7), ("boolean", "count", 6), ("negative_count", "count", 5),
                         ("no_exposure", "exposure", 2), ("rate_for_count", "count", 10)]:
            self.assertIn(expected, kinds)

    def test_a_decimal_comma_that_is_named_is_no_finding(self):
        self.assertEqual(self.kinds({"count": [3, 4], "exposure": ["3,5", "4,25"]}, decimal=",")[0][0], "text_number")

    def test_cells_have_addresses(self):
        found, _ = self.findings({"range": [["month", "falls"], ["Jan", 3], ["Feb", None]], "origin": "Falls.B4"})
        self.assertEqual(found[0]["cell"], "Falls.C6")
        self.assertIn("Falls.C6", found[0]["text"])

    def test_a_header_of_numbers(self):
        self.assertIn(("header", "1", None), self.kinds({"range": [[1, 2], [3, 4], [5, 6]]}))
        self.assertEqual(self.kinds({"range": [[1, 2], [3, 4], [5, 6]], "header": False}), [])

    def test_jumps_totals_repeats(self):
        days = list(DAYS)
        days[3] = 3405
        of = {"label": MONTHS + ["Total"], "count": FALLS + [sum(FALLS)], "exposure": days + [sum(days)]}
        self.assertEqual(self.kinds(of), [("exposure_jump", "exposure", 4), ("totals_row", "count", 9)])
        twice = {"label": MONTHS[:7] + ["Jan"], "count": FALLS, "exposure": DAYS}
        self.assertEqual(self.kinds(twice), [("repeated_period", "label", 8)])
        near = {"label": ["Ash", "Elm", "ash "], "count": [3, 4, 2], "exposure": [5, 6, 7]}
        self.assertEqual(self.kinds(near), [("nearly_repeated", "label", 3)])

    def test_logarithms_and_rates(self):
        logs = {"count": [3, 4, 50, 6, 3, 2, 4], "exposure": [6.9, 7.0, 9.5, 7.1, 7.2, 6.8, 7.4]}
        self.assertEqual(self.kinds(logs), [("exposure_logarithm", "exposure", None)])
        rates = {"count": [2.5, 3.75, 1.25, 7.5], "exposure": [1200, 800, 800, 400]}
        found, _ = self.findings(rates)
        self.assertEqual(found[0]["kind"], "rate_for_count")
        self.assertIn("per 1,000", found[0]["text"])

    def test_columns_are_taken_by_their_looks_and_said(self):
        _, answer = self.findings({"columns": {"month": MONTHS, "falls": FALLS, "bed_days": DAYS}})
        self.assertEqual(answer["tables"]["columns"]["taken_as"], ["label", "count", "exposure"])
        self.assertIn("falls as count", answer["say"])
        self.assertIn("guessed", [note["code"] for note in answer["notes"]])
        _, answer = self.findings({"columns": {"a": MONTHS, "b": DAYS, "c": FALLS},
                                   "roles": {"count": "c", "exposure": "b", "label": "a"}})
        self.assertEqual(answer["tables"]["columns"]["taken_as"], ["label", "exposure", "count"])

    def test_only_and_series(self):
        of = {"columns": {"ward": ["a"] * 8 + ["b"] * 8, "month": MONTHS * 2, "falls": FALLS * 2,
                          "bed_days": DAYS + [day * 40 for day in DAYS]}}
        self.assertEqual(self.kinds(of), [])
        self.assertEqual(self.findings({**of, "only": {"ward": "a"}})[1]["figures"]["rows"], 8)

    def test_every_form_of_data(self):
        replies = exchange([
            {"ask": "hold", "of": {"columns": {"falls": FALLS, "bed_days": DAYS}}, "with": {"name": "w"}},
            {"ask": "look_over", "of": {"held": "w"}},
        ])
        self.assertEqual(replies[1]["answer"]["figures"]["rows"], 8)
        self.refused({"ask": "look_over"}, "missing")
        self.refused({"ask": "look_over", "of": {"count": [1, 2], "exposure": [1]}}, "length_mismatch")
        self.assertEqual(self.kinds({"count": [], "exposure": []}), [])


class Unasked(WireTest):
    """What `look_over` would find is repeated only where it touches the question and is in real doubt."""

    def notes(self, request):
        return {note["code"]: note for note in self.answer(request)["notes"]}

    def test_a_jump_is_noted_with_its_place(self):
        days = list(DAYS)
        days[3] = 3405
        notes = self.notes({"ask": "how_often", "of": {"label": MONTHS, "count": FALLS, "exposure": days}})
        self.assertEqual(notes["exposure_jump"]["where"], [{"column": "exposure", "row": 4}])

    def test_logarithms_are_noted(self):
        self.assertIn("exposure_logarithm", self.notes({"ask": "how_often", "of": {
            "count": [3, 4, 50, 6, 3, 2, 4], "exposure": [6.9, 7.0, 9.5, 7.1, 7.2, 6.8, 7.4]}}))

    def test_repeated_labels_are_noted_where_rows_stand_alone(self):
        of = {"label": ["a", "b", "a"], "count": [3, 4, 5], "exposure": [5, 6, 7]}
        self.assertIn("repeated_label", self.notes({"ask": "who_stands_out", "of": of}))
        grouped = {"count": [3, 4, 5], "exposure": [5, 6, 7], "group": ["a", "b", "a"]}
        self.assertNotIn("repeated_label", self.notes({"ask": "how_often", "of": grouped}))

    def test_sound_tables_of_unlike_units_are_left_in_peace(self):
        exposures = [3.1, 250, 40, 7, 0.4, 1200, 66, 9]
        codes = self.notes({"ask": "who_stands_out", "of": {"label": list("abcdefgh"), "count": FALLS,
                                                            "exposure": exposures}})
        self.assertFalse({"exposure_jump", "exposure_shift", "exposure_logarithm", "repeated_label"} & set(codes))

    def test_rows_left_out_do_not_shift_places(self):
        days = [None] + list(DAYS)
        days[5] = 4405
        notes = self.notes({"ask": "how_often", "of": {"label": ["Dec"] + MONTHS, "count": [1] + FALLS,
                                                       "exposure": days}})
        self.assertEqual(notes["exposure_jump"]["where"], [{"column": "exposure", "row": 6}])

    def test_it_costs_little(self):
        n = 20000
        of = {"label": [f"unit {i}" for i in range(n)], "count": [i % 7 for i in range(n)],
              "exposure": [100 + i % 13 for i in range(n)]}
        lines = [json.dumps({"ask": "how_often", "of": of, "want": ["say"]})] * 2
        begun = time.monotonic()
        exchange(lines)
        self.assertLess(time.monotonic() - begun, 20)


if __name__ == "__main__":
    unittest.main()
