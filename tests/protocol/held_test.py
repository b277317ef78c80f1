# tests/protocol/held_test.py -- hello, hold, held, release: what they answer.
import unittest

from wire import Server, WireTest, how_often


class Hello(WireTest):
    arguments = ("--workers", "3", "--max-line", "100000")

    def test_hello(self):
        answer = self.answer({"ask": "hello"})
        figures = answer["figures"]
        self.assertRegex(figures["version"], r"^\d+\.\d+\.\d+$")
        self.assertEqual(figures["workers"], 3)
        self.assertEqual(figures["longest_line"], 100_000)
        self.assertEqual(figures["deepest_nesting"], 64)
        self.assertEqual(figures["files"], False)
        self.assertIsInstance(figures["protocol"], int)

    def test_the_order_is_one_of_two(self):
        self.refused({"ask": "hello", "with": {"order": "as_finshed"}}, "bad_value", hint='"as_finished"')
        self.refused({"ask": "hello", "with": {"order": 1}}, "bad_type")

    def test_a_service_has_no_stamp_no_method_and_no_caution(self):
        self.assertLessEqual(set(self.answer({"ask": "hello"})), {"say", "figures", "headline"})


class Held(WireTest):
    def tearDown(self):
        for name in self.answer({"ask": "held"})["tables"]["held"]["name"]:
            self.answer({"ask": "release", "with": {"name": name}})

    def hold(self, of, name="t", **rest):
        return {"ask": "hold", "of": of, "with": {"name": name}, **rest}

    def test_hold_describes_the_columns(self):
        columns = {
            "count": [1, 2, None, 2],
            "zone": ["a", "b", "", "a"],
            "mixed": [1, "x", "1", None],
            "wet": [True, False, True, None],
            "nothing": [None] * 4,
        }
        answer = self.answer(self.hold({"columns": columns}))
        table = answer["tables"]["columns"]
        self.assertEqual(table["name"], list(columns))
        self.assertEqual(table["kind"], ["numbers", "levels", "numbers and texts", "levels", "blank"])
        self.assertEqual(table["rows"], [4] * 5)
        self.assertEqual(table["levels"], [2, 2, 3, 2, 0])
        self.assertEqual(table["blanks"], [1, 1, 1, 1, 4])
        self.assertEqual(answer["figures"], {"rows": 4, "columns": 5})

    def test_beyond_a_thousand_different_numbers_they_are_not_counted(self):
        table = self.answer(self.hold({"columns": {"a": list(range(1000)), "b": list(range(1, 1001))}}))["tables"][
            "columns"
        ]
        self.assertEqual(table["levels"], [1000, 1000])
        table = self.answer(self.hold({"columns": {"a": list(range(1001))}}))["tables"]["columns"]
        self.assertEqual(table["levels"], [None])

    def test_held_lists_and_release_drops(self):
        self.answer(self.hold({"columns": {"a": [1]}}, "one"))
        self.answer(self.hold({"columns": {"a": [1, 2], "b": [3, 4]}}, "two"))
        table = self.answer({"ask": "held"})["tables"]["held"]
        self.assertEqual(table, {"name": ["one", "two"], "rows": [1, 2], "columns": [1, 2]})
        self.answer({"ask": "release", "with": {"name": "one"}})
        self.assertEqual(self.answer({"ask": "held"})["tables"]["held"]["name"], ["two"])
        self.refused({"ask": "release", "with": {"name": "tow"}}, "not_found", hint='"two"')

    def test_holding_again_replaces(self):
        self.answer(self.hold({"columns": {"count": [1]}}))
        self.answer(self.hold({"columns": {"count": [5]}}))
        self.assertEqual(self.answer(how_often({"held": "t"}))["figures"]["count"], 5)

    def test_what_hold_refuses(self):
        self.refused({"ask": "hold", "of": {"columns": {"a": [1]}}}, "missing", text="name")
        self.refused(self.hold({"columns": {"a": [1]}}, ""), "missing", text="name")
        self.refused({"ask": "hold", "with": {"name": "t"}}, "missing", text="table")
        self.refused(self.hold({"columns": {"a": [1], "b": [1, 2]}}), "length_mismatch")
        self.refused(self.hold({"range": [["a", "a"], [1, 2]]}), "bad_value")
        self.refused(self.hold({"columns": {"a": [1]}}, 5), "bad_type", text="name")
        self.refused({"ask": "release"}, "missing", text="name")
        self.assertEqual(self.answer({"ask": "held"})["tables"]["held"]["name"], [])

    def test_a_refused_hold_keeps_what_was_held(self):
        self.answer(self.hold({"columns": {"count": [1]}}))
        self.refused(self.hold({"columns": {"a": [1], "b": [1, 2]}}), "length_mismatch")
        self.assertEqual(self.answer(how_often({"held": "t"}))["figures"]["count"], 1)

    def test_names_of_any_letters(self):
        for name in ("é😀", "a b", "../x", '"', "0"):
            self.answer(self.hold({"columns": {"count": [3]}}, name))
            self.assertEqual(self.answer(how_often({"held": name}))["figures"]["count"], 3)

    def test_a_server_of_its_own_holds_nothing_of_another(self):
        self.answer(self.hold({"columns": {"count": [1]}}))
        with Server() as other:
            self.assertEqual(other.ask(how_often({"held": "t"}))["refused"]["code"], "not_found")


if __name__ == "__main__":
    unittest.main()
