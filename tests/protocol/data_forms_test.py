# tests/protocol/data_forms_test.py -- the same table in every form gives the same answer.
import unittest

from wire import WireTest, how_often, packed


COUNT, EXPOSURE, MATERIAL = [3, 0, 5], [12, 9.5, 20], ["iron", "pvc", "steel"]
ROLES = {"count": "bursts", "exposure": "km_years", "label": "material"}
COLUMNS = {"material": MATERIAL, "bursts": COUNT, "km_years": EXPOSURE}
ROWS = [list(row) for row in zip(MATERIAL, COUNT, EXPOSURE)]
RANGE = [list(COLUMNS), *ROWS]
FORMS = {
    "direct": {"count": COUNT, "exposure": EXPOSURE, "label": MATERIAL},
    "columns": {"columns": COLUMNS, "roles": ROLES},
    "columns named like roles": {"columns": {"label": MATERIAL, "count": COUNT, "exposure": EXPOSURE}},
    "range": {"range": RANGE, "roles": ROLES},
    "range without a header": {"range": ROWS, "header": False, "roles": {"label": "1", "count": "2", "exposure": "3"}},
    "packed": {"columns": COLUMNS | {"bursts": packed(COUNT), "km_years": packed(EXPOSURE)}, "roles": ROLES},
    "levels": {"columns": COLUMNS | {"material": {"levels": ["steel", "iron", "pvc"], "codes": [1, 2, 0]}}, "roles": ROLES},
    "texts": {"columns": COLUMNS | {"bursts": ["3", "0", "5"]}, "roles": ROLES},
    "floats": {"columns": COLUMNS | {"bursts": [3.0, 0e0, 50e-1]}, "roles": ROLES},
}  # fmt: skip


class DataForms(WireTest):
    def test_every_form_gives_the_same_answer(self):
        wanted = self.answer(how_often(FORMS["direct"]))
        for name, of in FORMS.items():
            with self.subTest(name):
                answer = self.answer(how_often(of))
                answer["picture"]["x"]["name"] = "label"  # the column's own name
                for part in ("say", "figures", "tables", "picture", "method"):
                    self.assertEqual(answer[part], wanted[part], part)
        self.assertEqual(wanted["tables"]["rates"]["label"], MATERIAL)

    def test_held(self):
        self.answer({"ask": "hold", "of": {"columns": COLUMNS}, "with": {"name": "mains"}})
        held = self.answer(how_often({"held": "mains", "roles": ROLES}))
        self.assertEqual(held, self.answer(how_often(FORMS["columns"])))
        self.refused(how_often({"held": "manis", "roles": ROLES}), "not_found", text='"manis"', hint='"mains"')
        self.answer({"ask": "release", "with": {"name": "mains"}})
        self.refused(how_often({"held": "mains", "roles": ROLES}), "not_found")

    def test_the_stamp_follows_the_cells_and_options_not_the_form(self):
        def stamp(of, **with_):
            return self.answer(how_often(of, **{"with": with_}))["stamp"]["data"]

        self.assertRegex(stamp(FORMS["direct"]), "^[0-9a-f]{16}$")
        self.assertEqual(stamp(FORMS["direct"]), stamp(FORMS["columns"]))
        self.assertEqual(stamp(FORMS["direct"]), stamp(FORMS["range"]))
        self.assertEqual(stamp(FORMS["direct"]), stamp(FORMS["packed"]))
        self.assertEqual(stamp(FORMS["direct"]), stamp(FORMS["direct"], confidence=0.95, per=1, limits="exact"))
        others = [
            stamp(FORMS["direct"] | {"count": [3, 0, 6]}),
            stamp(FORMS["direct"] | {"label": ["iron", "pvc", "stone"]}),
            stamp(FORMS["direct"], confidence=0.9),
            stamp(FORMS["direct"], limits="mid-p"),
            stamp(FORMS["direct"] | {"only": {"label": ["iron", "pvc"]}}),
            stamp({"count": COUNT, "label": MATERIAL}),
        ]
        self.assertEqual(len({stamp(FORMS["direct"]), *others}), 1 + len(others))

    def test_a_single_row(self):
        self.assertEqual(self.answer(how_often({"count": 7, "exposure": 1200}))["figures"]["exposure"], 1200)
        self.assertEqual(
            self.answer(how_often({"columns": {"count": 7, "exposure": "1200"}}))["figures"]["exposure"], 1200
        )
        answer = self.answer(how_often({"count": 7, "exposure": 1200, "label": "North"}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["North"])
        answer = self.answer(how_often({"count": 7, "label": True}))
        self.assertEqual(answer["tables"]["rates"]["label"], ["true"])

    def test_nothing_is_reserved_inside_columns(self):
        names = [
            "columns",
            "range",
            "held",
            "file",
            "roles",
            "only",
            "origin",
            "header",
            "line",
            "id",
            "model",
            "f64",
            "levels",
            "codes",
            "",
        ]
        columns = {name: [1, 2] for name in names}
        for name in names:
            with self.subTest(name):
                self.answer(how_often({"columns": columns, "roles": {"count": name}}))

    def test_a_column_named_like_a_role_but_cast_for_another(self):
        of = {"columns": {"exposure": [1, 2], "count": [30, 40]}, "roles": {"count": "exposure", "exposure": "count"}}
        self.assertEqual(self.answer(how_often(of))["figures"]["exposure"], 70)
        # With roles given, nothing is taken by its name alone.
        of = {"columns": {"bursts": [1, 2], "exposure": [30, 40]}, "roles": {"count": "bursts"}}
        self.note(self.answer(how_often(of)), "no_exposure")

    def test_two_columns_of_one_name(self):
        of = {"range": [["a", "b", "a"], [1, 2, 3]], "roles": {"count": "b"}}
        self.refused(how_often(of), "bad_value", text='"a"', column="a")

    def test_headers_of_a_range(self):
        of = {"range": [["count", None, 2023, True, 95.0], [1, 2, 3, 4, 5]]}
        for name, count in (("2", 2), ("2023", 3), ("true", 4), ("95", 5)):
            answer = self.answer(how_often(of | {"roles": {"count": name}}))
            self.assertEqual(answer["figures"]["count"], count)
        self.refused(how_often(of | {"roles": {"count": "nope"}}), "not_found", hint="count, 2, 2023, true, 95")

    def test_a_range_without_rows(self):
        self.refused(how_often({"range": []}), "missing")
        self.refused(how_often({"range": [["count", "exposure"]]}), "too_few")
        self.refused(how_often({"range": [[], [1]], "roles": {"count": "1"}}), "not_found")

    def test_forms_of_the_wrong_type(self):
        for key, value in [
            ("columns", [1]), ("columns", 5), ("columns", "a"), ("range", {}), ("range", 5), ("range", "a"), ("range", [1]),
            ("range", [["count"], "x"]), ("range", [["count"], {"a": 1}]), ("held", 5), ("held", ["a"]), ("file", 5),
            ("file", {}), ("header", 1), ("header", "no"), ("roles", 5), ("roles", ["count"]), ("roles", "count"),
            ("only", 5), ("only", ["count"]), ("origin", 5), ("origin", ["A1"]),
        ]:  # fmt: skip
            with self.subTest(key=key, value=value):
                of = {key: value} if key in ("columns", "range", "held", "file") else {"count": [1, 2], key: value}
                self.refused(how_often(of), "bad_type", text=key)
        self.refused(how_often({"columns": {"a": [1]}, "roles": {"count": 5}}), "bad_type", text="count")

    def test_null_is_as_good_as_absent(self):
        self.answer(
            how_often(
                {"count": [1], "roles": None, "only": None, "origin": None, "header": None, "held": None, "file": None}
            )
        )
        self.answer(how_often({"columns": {"a": [1], "b": [2]}, "roles": {"count": "a", "exposure": None}}))

    def test_cells_of_the_wrong_type(self):
        for cell in ([1], {"a": 1}, [], {}, [[1]]):
            with self.subTest(cell=cell):
                self.refused(how_often({"count": [1, cell]}), "bad_type", column="count", row=2)
                self.refused(how_often({"range": [["count"], [1], [cell]]}), "bad_type", column="count", row=2)
                self.refused(how_often({"count": [1, 2], "group": ["a", cell]}), "bad_type", column="group", row=2)


class Packed(WireTest):
    def test_nan_is_a_blank(self):
        answer = self.answer(how_often({"count": packed([1, float("nan"), 2])}))
        self.assertEqual(answer["figures"]["count"], 3)
        self.assertEqual(self.note(answer, "blank")["where"], [{"column": "count", "row": 2}])

    def test_an_infinity_is_refused_with_its_row(self):
        inf = float("inf")
        self.refused(how_often({"count": [1, 1], "exposure": packed([1, inf])}), "bad_value", column="exposure", row=2)
        self.refused(how_often({"count": packed([-inf, 1])}), "bad_value", column="count", row=1)
        self.refused(how_often({"count": [1, 1], "group": packed([1, inf])}), "bad_value", column="group", row=2)
        # A column that the question does not read may hold what it likes.
        self.answer(how_often({"columns": {"a": [1, 1], "b": packed([1, inf])}, "roles": {"count": "a"}}))

    def test_codes(self):
        of = {"count": [1, 2, 3, 4], "group": {"levels": ["iron", "pvc", "never"], "codes": [1, -1, 0, 1]}}
        answer = self.answer(how_often(of))
        self.assertEqual(answer["tables"]["rates"]["label"], ["pvc", "iron"])
        self.assertEqual(answer["tables"]["rates"]["count"], [5, 3])
        self.assertEqual(self.note(answer, "blank")["where"], [{"column": "group", "row": 2}])
        for codes, row in (([0, 3], 2), ([-2, 0], 1), ([0, 1.5], 2), ([0, 1e99], 2)):
            of = {"count": [1, 2], "group": {"levels": ["a", "b", "c"], "codes": codes}}
            self.refused(how_often(of), "bad_value", column="group", row=row)

    def test_levels_are_texts_numbers_or_booleans(self):
        of = {"count": [1, 2, 4], "group": {"levels": [2023, "x", True], "codes": [0, 1, 2]}}
        self.assertEqual(self.answer(how_often(of))["tables"]["rates"]["label"], ["2023", "x", "true"])

    def test_levels_are_never_numbers(self):
        of = {"count": {"levels": ["1", "2"], "codes": [0, 1]}}
        self.refused(how_often(of), "bad_type", column="count")

    def test_packed_and_plain_lengths_must_agree(self):
        self.refused(how_often({"count": packed([1, 2]), "exposure": [1, 2, 3]}), "length_mismatch", text="2 rows")

    def test_broken_packing(self):
        good = packed([1, 2])["f64"]
        for value in (
            "A",
            "AAA",
            "AAAA",
            good[:-1],
            good + "A",
            "?" + good[1:],
            "\u00e9" + good[2:],
            good[:-4] + "====",
            "=" + good[1:],
        ):
            with self.subTest(value=value):
                self.refused(how_often({"count": {"f64": value}}), "bad_value", column="count", text="base64")
        for shape in (
            {}, {"f64": 5}, {"f64": [good]}, {"f64": None}, {"levels": ["a"]}, {"codes": [0]}, {"levels": "a", "codes": [0]},
            {"levels": ["a"], "codes": 0}, {"levels": [["a"]], "codes": [0]}, {"levels": [None], "codes": [0]},
            {"levels": ["a"], "codes": [[0]]}, {"levels": ["a"], "codes": ["0"]}, {"levels": ["a"], "codes": [None]},
            {"f64": good, "codes": [0]}, {"f64": good, "levels": ["a"], "codes": [0]}, {"levels": {}, "codes": []},
        ):  # fmt: skip
            with self.subTest(shape=shape):
                self.refused(how_often({"count": shape}), "bad_type", column="count")
        self.assertEqual(self.answer(how_often({"count": {"f64": good}}))["figures"]["count"], 3)
        self.refused(how_often({"count": {"f64": ""}}), "too_few")


if __name__ == "__main__":
    unittest.main()
