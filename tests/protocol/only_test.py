# tests/protocol/only_test.py -- `of.only` keeps the rows with the levels named.
import unittest

from wire import WireTest, how_often

COLUMNS = {
    "quarter": ["Q1", "Q2", "Q3", "Q1", None],
    "year": [2023, 2023, 2024, 2024, 2024],
    "wet": [True, False, True, False, None],
    "mixed": [1, "1", "x", 0.5, "0.50"],
    "count": [1, 2, 4, 8, 16],
}


class Only(WireTest):
    def kept(self, only):
        answer = self.answer(how_often({"columns": COLUMNS, "only": only}))
        return answer["figures"]["count"], answer

    def test_rows_with_the_levels_named_are_kept(self):
        for only, count in [
            ({"quarter": ["Q1", "Q2"]}, 11), ({"quarter": "Q3"}, 4), ({"quarter": [None]}, 16), ({"quarter": None}, 16),
            ({"year": [2023]}, 3), ({"year": "2024"}, 28), ({"year": [2023.0]}, 3), ({"wet": True}, 5), ({"wet": ["false"]}, 10),
            ({"mixed": 1}, 3), ({"mixed": ["0.5"]}, 8), ({"mixed": "0.50"}, 16), ({"quarter": "Q1", "year": 2024}, 8), ({}, 31),
        ]:  # fmt: skip
            with self.subTest(only=only):
                self.assertEqual(self.kept(only)[0], count)

    def test_rows_left_by_choice_are_no_note(self):
        _, answer = self.kept({"quarter": ["Q1"]})
        self.no_note(answer, "blank")
        self.assertEqual(answer["tables"]["rates"]["label"], ["1", "4"])

    def test_a_value_that_no_row_has_is_noted(self):
        _, answer = self.kept({"quarter": ["Q1", "Q9", "Q8"]})
        self.assertEqual(self.note(answer, "only_unmatched")["text"], 'No row of quarter is "Q9", "Q8".')
        _, answer = self.kept({"year": ["2023", "2023.0"]})
        self.note(answer, "only_unmatched")

    def test_nothing_left(self):
        self.refused(how_often({"columns": COLUMNS, "only": {"quarter": ["Q9"]}}), "too_few")
        self.refused(how_often({"columns": COLUMNS, "only": {"quarter": []}}), "too_few")

    def test_an_unknown_column(self):
        self.refused(
            how_often({"columns": COLUMNS, "only": {"quater": ["Q1"]}}), "not_found", text='"quater"', hint='"quarter"'
        )

    def test_a_value_that_is_no_level(self):
        for value in ([["Q1"]], {"a": 1}, [{}]):
            with self.subTest(value=value):
                self.refused(how_often({"columns": COLUMNS, "only": {"quarter": value}}), "bad_type", text="quarter")

    def test_only_with_every_form(self):
        self.assertEqual(
            self.answer(how_often({"count": [1, 2], "label": ["a", "b"], "only": {"label": "b"}}))["figures"]["count"],
            2,
        )
        of = {"range": [["count", "zone"], [1, "a"], [2, "b"]], "only": {"zone": "b"}}
        self.assertEqual(self.answer(how_often(of))["figures"]["count"], 2)


if __name__ == "__main__":
    unittest.main()
