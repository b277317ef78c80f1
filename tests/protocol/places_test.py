# tests/protocol/places_test.py -- refusals and notes name the host's own cells where the origin was given.
import unittest

from wire import WireTest, how_often


class Places(WireTest):
    RANGE = [["ward", "falls", "days"], ["A", 3, 900], ["B", -1, 800], ["C", 2, None]]
    ROLES = {"label": "ward", "count": "falls", "exposure": "days"}

    def test_a_range_with_its_header(self):
        of = {"range": self.RANGE, "roles": self.ROLES, "origin": "Falls.B4"}
        refusal = self.refused(how_often(of), "bad_count", column="falls", row=2, cell="Falls.C6")
        self.assertIn("Falls.C6", refusal["text"])

    def test_a_range_without_a_header(self):
        of = {"range": self.RANGE[1:], "header": False, "roles": {"count": "2"}, "origin": "Falls.B4"}
        self.refused(how_often(of), "bad_count", column="2", row=2, cell="Falls.C5")

    def test_addresses_as_hosts_write_them(self):
        for origin, cell in [
            ("B4", "C6"), ("$B$4", "$C6"), ("Falls!B4", "Falls!C6"), ("$Falls.$B$4", None), ("'My sheet'.Z9", "'My sheet'.AA11"),
            ("'2024!'!AZ1", "'2024!'!BA3"), ("b4", "C6"), ("Q.1.XFC1", "Q.1.XFD3"), ("Sheet 1.A1048570", "Sheet 1.B1048572"),
        ]:  # fmt: skip
            with self.subTest(origin):
                of = {"range": self.RANGE, "roles": self.ROLES, "origin": origin}
                refusal = self.refused(how_often(of), "bad_count", row=2)
                if cell:
                    self.assertEqual(refusal["where"][0]["cell"].replace("$", ""), cell.replace("$", ""))

    def test_what_is_no_address(self):
        for origin in (
            "B",
            "4",
            "4B",
            "Falls.",
            "Falls.B",
            "B4:C9",
            "ABCD4",
            "B0",
            "B1234567890",
            "Falls B4",
            "B-4",
            "ä4",
        ):
            with self.subTest(origin):
                self.refused(how_often({"count": [1], "origin": origin}), "bad_value", text="origin")
                self.refused(
                    {"ask": "hold", "of": {"columns": {"a": [1]}, "origin": origin}, "with": {"name": "x"}},
                    "bad_value",
                    text="origin",
                )
        self.answer(how_often({"count": [1], "origin": ""}))

    def test_notes_name_cells_too(self):
        of = {
            "range": [["falls", "days"], [3, 900], [1, 800], [2, None]],
            "roles": {"count": "falls", "exposure": "days"},
            "origin": "B4",
        }
        note = self.note(self.answer(how_often(of)), "blank")
        self.assertEqual(note["where"], [{"column": "days", "row": 3, "cell": "C7"}])
        self.assertIn("C7", note["text"])

    def test_a_held_table_remembers_where_it_lies(self):
        self.answer({"ask": "hold", "of": {"range": self.RANGE, "origin": "Falls.B4"}, "with": {"name": "falls"}})
        self.refused(how_often({"held": "falls", "roles": self.ROLES}), "bad_count", cell="Falls.C6")
        self.refused(how_often({"held": "falls", "roles": self.ROLES, "origin": "X.A1"}), "bad_count", cell="X.B3")
        self.refused({"ask": "hold", "of": {"columns": {"a": [1]}, "origin": 4}, "with": {"name": "x"}}, "bad_type")

    def test_columns_lie_in_the_order_in_which_they_were_sent(self):
        of = {"columns": {"z": [1], "a": [1], "count": [-1]}, "origin": "A1"}
        self.refused(how_often(of), "bad_count", cell="C2")


if __name__ == "__main__":
    unittest.main()
