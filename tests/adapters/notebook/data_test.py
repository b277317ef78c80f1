# tests/adapters/notebook/data_test.py -- does a first argument with its roles become the right `of`?
import math
import pathlib
import unittest

import numpy as np
import pandas as pd
import support  # noqa: F401  finds the package

from countsel import Held, Range, Refused
from countsel.data import all_columns, frame, of_data, plain

ENTRY = {"takes_columns": False, "roles": [{"name": "count"}, {"name": "exposure"}, {"name": "group"}]}
WIDE = ENTRY | {"takes_columns": True}
TABLE = {"kind": ["a", "b"], "n": ["3", "4"], "km": ["1", "2"], "odd": [object(), object()]}


def of(data, only=None, entry=ENTRY, **roles):
    return of_data(data, roles, entry, only)


class Forms(unittest.TestCase):
    def test_only_what_is_named_is_sent(self):
        self.assertEqual(
            of(TABLE, count="n", exposure="km"),
            ({"columns": {"n": ["3", "4"], "km": ["1", "2"]}, "roles": {"count": "n", "exposure": "km"}}, 2),
        )
        sent, _ = of(TABLE, only={"kind": ["a"]}, count="n")
        self.assertEqual((list(sent["columns"]), sent["only"]), (["kind", "n"], {"kind": ["a"]}))

    def test_all_columns_go_where_columns_without_a_role_are_used(self):
        sent, _ = of({"n": ["1"], "soil": ["clay"]}, entry=WIDE, count="n")
        self.assertEqual(sent, {"columns": {"n": ["1"], "soil": ["clay"]}, "roles": {"count": "n"}})

    def test_without_roles_columns_named_like_them(self):
        sent, _ = of({"count": ["1"], "group": ["a"], "else": ["x"]})
        self.assertEqual(sent, {"columns": {"count": ["1"], "group": ["a"]}})

    def test_values_for_a_role_are_a_column_of_their_own(self):
        sent, _ = of({"n": ["1"]}, count="n", exposure=["9"])
        self.assertEqual(sent["columns"], {"n": ["1"], "exposure": ["9"]})
        sent, _ = of({"count": ["1"], "exposure": ["5"]}, count="count", exposure=["9"])
        self.assertEqual(sent["columns"], {"count": ["1"], "exposure (given)": ["9"]})
        self.assertEqual(sent["roles"]["exposure"], "exposure (given)")

    def test_nothing_but_roles(self):
        self.assertEqual(of(None, count=["1"], group=["a"]), ({"count": ["1"], "group": ["a"]}, 1))
        self.assertEqual(
            of(None, count=3, exposure=np.float64(1.5), group="a"),
            ({"count": 3, "exposure": 1.5, "group": "a"}, 1),
        )
        self.assertEqual(of(None, count=math.nan)[0], {"count": None})

    def test_bare_cells_are_a_table_of_one_row(self):
        self.assertEqual(
            of({"count": "3", "exposure": "9"}), ({"columns": {"count": ["3"], "exposure": ["9"]}}, 1)
        )

    def test_held_and_file_take_names(self):
        table = Held(None, "mains", 7, ["n"])
        self.assertEqual(of(table, count="n"), ({"held": "mains", "roles": {"count": "n"}}, 7))
        self.assertEqual(of(table), ({"held": "mains"}, 7))
        self.assertEqual(of(pathlib.Path("a.csv"), count="n"), ({"file": "a.csv", "roles": {"count": "n"}}, None))
        with self.assertRaisesRegex(Refused, "name of a column"):
            of(table, count=[1, 2])

    def test_rows_as_in_a_sheet(self):
        rows = [["month", "falls"], ["Jan", np.int64(3)], ("Feb", math.nan)]
        sent = {"range": [["month", "falls"], ["Jan", 3], ["Feb", None]], "roles": {"count": "falls"}}
        self.assertEqual(of(rows, count="falls"), (sent, 2))
        placed = Range(rows[1:], header=False, origin="Falls.B4")
        wanted = {"range": sent["range"][1:], "header": False, "origin": "Falls.B4"}
        self.assertEqual(of(placed), (wanted, 2))
        self.assertEqual(all_columns(placed), (wanted, 2))
        self.assertEqual(repr(Range([[1]], False, "B4")), "countsel.Range([[1]], header=False, origin='B4')")
        with self.assertRaisesRegex(Refused, "row 2"):
            of([["a"], [object()]])

    def test_a_name_that_is_not_there_is_left_to_the_engine_with_the_names_that_are(self):
        sent, _ = of(TABLE, count="m", exposure="km")
        self.assertEqual(sent["columns"], {"kind": [], "n": [], "km": [], "odd": []})

    def test_a_frame(self):
        table = pd.DataFrame({"n": ["1"], 7: ["x"]})
        self.assertEqual(of(table, count="n", group=7)[0]["roles"], {"count": "n", "group": "7"})
        self.assertEqual(of(table, count="n", group="7")[0]["columns"], {"n": ["1"], "7": ["x"]})

    def test_another_librarys_frame(self):
        class Column:
            def to_list(self):
                return ["1", "2"]

        class Frame:
            columns = ["n"]

            def __getitem__(self, name):
                return Column()

        self.assertEqual(of(Frame(), count="n"), ({"columns": {"n": ["1", "2"]}, "roles": {"count": "n"}}, 2))

    def test_the_data_are_not_changed(self):
        table = pd.DataFrame({"n": [1, 2], "k": pd.Categorical(["a", "b"])})
        before = table.copy(deep=True)
        of(table, count="n", group="k", exposure=[1, 2])
        all_columns(table)
        pd.testing.assert_frame_equal(table, before)


class Refusals(unittest.TestCase):
    def test_twins(self):
        with self.assertRaisesRegex(Refused, 'Two columns are named "n"'):
            frame(pd.DataFrame([[1, 2]], columns=["n", "n"]))

    def test_a_series_of_another_order_is_not_taken_by_position(self):
        table = pd.DataFrame({"n": [1, 2]})
        turned = pd.Series([5, 6], index=[1, 0])
        with self.assertRaisesRegex(Refused, "index"):
            of(table, count="n", exposure=turned)
        self.assertIn("exposure", of(table, count="n", exposure=turned.to_numpy())[0]["columns"])

    def test_what_is_no_table(self):
        for data in (5, [1, 2], object()):
            with self.assertRaises(Refused) as caught:
                of(data, count="n")
            self.assertEqual(caught.exception.code, "bad_type")
        with self.assertRaisesRegex(Refused, "needs a table"):
            all_columns(None)


class Options(unittest.TestCase):
    def test_options_become_plain(self):
        given = {"a": np.int64(3), "b": (1, np.float64(2)), "c": pd.Series(["x"]), "d": {"k": math.inf}, 5: True}
        self.assertEqual(plain(given, "with"), {"a": 3, "b": [1, 2], "c": ["x"], "d": {"k": "inf"}, "5": True})
        with self.assertRaisesRegex(Refused, "with.a"):
            plain({"a": object()}, "with")


if __name__ == "__main__":
    unittest.main()
