# tests/adapters/notebook/column_test.py -- does a column reach the wire as what it is?
import array
import base64
import datetime
import decimal
import fractions
import json
import math
import unittest

import numpy as np
import pandas as pd
import support  # noqa: F401  finds the package

from countsel import Refused
from countsel.column import column, is_scalar


def doubles(packed):
    return array.array("d", base64.b64decode(packed["f64"])).tolist()


def sent(values):
    """What JSON makes of the column: nothing but JSON may be in it."""
    return json.loads(json.dumps(column(values, "x")[0], allow_nan=False))


class Numbers(unittest.TestCase):
    exact = [0.1, -0.0, 5e-324, 1.7976931348623157e308, 2.0**53, 1 / 3, 1e-300]

    def test_doubles_arrive_bit_by_bit_from_any_container(self):
        containers = [list, tuple, np.array, pd.Series, pd.Index, lambda v: array.array("d", v), lambda v: iter(v)]
        for make in containers:
            got, rows = column(make(self.exact), "x")
            self.assertEqual([value.hex() for value in doubles(got)], [value.hex() for value in self.exact])
            self.assertEqual(rows, len(self.exact))
        self.assertEqual(doubles(sent(pd.Series(self.exact, dtype="Float64"))), self.exact)
        self.assertEqual(doubles(sent(np.array(self.exact)[::-2])), self.exact[::-2])
        self.assertEqual(doubles(sent(np.array([1, 2], dtype=">f4"))), [1, 2])

    def test_whole_numbers_of_every_kind(self):
        for make in (list, lambda v: range(1, 4), np.array, pd.Series, lambda v: np.array(v, dtype="u1")):
            self.assertEqual(doubles(sent(make([1, 2, 3]))), [1, 2, 3])
        self.assertEqual(doubles(sent(pd.Series([1, 3], dtype="Int64"))), [1, 3])

    def test_beyond_what_a_double_can_hold_they_are_written_out(self):
        large = 2**53 + 1
        for values in (
            [1, large],
            np.array([1, large]),
            pd.Series([1, large]),
            pd.Series([1, large], dtype="Int64"),
        ):
            self.assertEqual(sent(values), [1, large])
        self.assertEqual(sent(np.array([2**64 - 1], dtype="u8")), [2**64 - 1])
        self.assertEqual(sent([large, math.nan, None]), [large, None, None])
        self.assertEqual(sent(pd.Series([large, None], dtype="Int64")), [large, None])

    def test_blanks_are_nan(self):
        for values in (
            [1, None],
            [1.0, math.nan],
            [1, pd.NA],
            np.array([1, np.nan]),
            pd.Series([1, None]),
            pd.Series([1, None], dtype="Int64"),
            pd.Series([1, None], dtype=object),
            np.ma.array([1, 2], mask=[False, True]),
        ):
            got = doubles(sent(values))
            self.assertEqual(got[0], 1)
            self.assertTrue(math.isnan(got[1]))

    def test_exact_kinds_become_doubles(self):
        self.assertEqual(
            doubles(sent([decimal.Decimal("0.1"), fractions.Fraction(1, 4), np.float32(2)])), [0.1, 0.25, 2]
        )

    def test_infinity_is_left_to_the_engine_to_refuse(self):
        self.assertEqual(doubles(sent([math.inf])), [math.inf])


class Others(unittest.TestCase):
    def test_texts_stay_texts(self):
        for values in (
            ["12", "", "  ", "#N/A", "ü"],
            np.array(["12", "", "  ", "#N/A", "ü"]),
            pd.Series(["12", "", "  ", "#N/A", "ü"], dtype="string"),
        ):
            self.assertEqual(sent(values), ["12", "", "  ", "#N/A", "ü"])

    def test_blank_texts(self):
        for values in (["a", None], ["a", math.nan], pd.Series(["a", None], dtype="string"), ["a", pd.NaT]):
            self.assertEqual(sent(values), ["a", None])

    def test_booleans_are_never_numbers(self):
        for values in ([True, False], np.array([True, False]), pd.Series([True, False])):
            self.assertEqual(sent(values), [True, False])
        self.assertEqual(sent(pd.Series([True, None], dtype="boolean")), [True, None])
        self.assertEqual(sent([True, 2]), [True, 2])
        self.assertEqual(sent([True, math.nan]), [True, None])

    def test_categories_are_levels_and_codes(self):
        self.assertEqual(
            sent(pd.Series(["pvc", None, "iron", "pvc"], dtype=pd.CategoricalDtype(["clay", "iron", "pvc"]))),
            {"levels": ["iron", "pvc"], "codes": [1, -1, 0, 1]},
        )
        self.assertEqual(sent(pd.Categorical([95.0, 7.5]))["levels"], ["7.5", "95"])
        self.assertEqual(sent(pd.Categorical([True, False]))["levels"], ["false", "true"])
        self.assertEqual(sent(pd.cut(pd.Series([1, 9]), [0, 5, 10]))["levels"], ["(0, 5]", "(5, 10]"])
        self.assertEqual(sent(pd.Series([], dtype="category")), {"levels": [], "codes": []})

    def test_days_and_moments_are_iso_texts(self):
        day, moment = datetime.date(2024, 3, 1), datetime.datetime(2024, 3, 1, 14, 30)
        midnight = datetime.datetime(2024, 3, 1)
        for values in (
            [day, None],
            [midnight, None],
            pd.Series([midnight, None]),
            np.array(["2024-03-01", "NaT"], "M8[ns]"),
        ):
            self.assertEqual(sent(values), ["2024-03-01", None])
        self.assertEqual(sent([midnight, moment]), ["2024-03-01T00:00:00", "2024-03-01T14:30:00"])
        self.assertEqual(sent(pd.Series([moment]).dt.tz_localize("UTC")), ["2024-03-01T14:30:00+00:00"])
        self.assertEqual(sent([np.datetime64("2024-03-01T00:00:01", "ns")]), ["2024-03-01T00:00:01"])
        self.assertEqual(sent(pd.Series(pd.period_range("2024-01", periods=2, freq="M"))), ["2024-01", "2024-02"])
        self.assertEqual(sent(pd.Categorical([pd.Timestamp(midnight)]))["levels"], ["2024-03-01"])

    def test_a_packed_column_passes(self):
        packed = {"levels": ["a"], "codes": [0, -1]}
        self.assertEqual(column(packed, "x"), (packed, 2))
        self.assertEqual(column(column([1.0, 2.0, 3.0], "x")[0], "x")[1], 3)

    def test_an_empty_column_is_empty(self):
        for values in ([], np.array([]), pd.Series([], dtype=float), pd.Series([], dtype="Int64")):
            self.assertEqual(column(values, "x")[1], 0)

    def test_what_is_one_cell(self):
        for value in (
            1,
            1.5,
            "a",
            None,
            True,
            np.int64(1),
            np.array(2),
            pd.NA,
            pd.NaT,
            day := datetime.date(2024, 1, 1),
        ):
            self.assertTrue(is_scalar(value), value)
        for value in ([1], (1,), np.array([1]), pd.Series([1]), range(2), {"f64": ""}, [day]):
            self.assertFalse(is_scalar(value), value)


class Refusals(unittest.TestCase):
    def refused(self, values, code, row=None):
        with self.assertRaises(Refused) as caught:
            column(values, "hours")
        self.assertEqual((caught.exception.code, caught.exception.row), (code, row))
        self.assertIn("hours", caught.exception.text)
        return caught.exception

    def test_the_row_is_named(self):
        self.refused([1, [2]], "bad_type", 2)
        self.refused(["a", {"b": 1}], "bad_type", 2)
        self.refused([1, b"2"], "bad_type", 2)
        self.refused([1, 1j], "bad_type", 2)
        self.refused([2**60, math.inf], "bad_value", 2)

    def test_a_length_of_time_needs_a_unit(self):
        for values in ([datetime.timedelta(hours=1)], pd.Series(pd.to_timedelta(["1h"]))):
            self.assertIn("unit", self.refused(values, "bad_type", 1).hint)

    def test_what_is_no_column(self):
        self.refused(np.zeros((2, 2)), "bad_type")
        self.refused({"a": 1}, "bad_type")
        self.refused(object(), "bad_type")


if __name__ == "__main__":
    unittest.main()
