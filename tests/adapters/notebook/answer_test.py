# tests/adapters/notebook/answer_test.py -- is an answer what a notebook expects, with and without pandas?
import math
import pickle
import unittest
from html.parser import HTMLParser
from unittest import mock

import numpy as np
import pandas as pd
import support  # noqa: F401  finds the package

from countsel import Answer, EngineDied, Refused
from countsel.look import html_of
from countsel.progress import bar_html

ENTRY = {
    "figures": [{"name": "rate", "style": "rate"}, {"name": "best", "style": "text"}],
    "tables": [
        {
            "name": "rates",
            "columns": [
                {"name": "label", "style": "text"},
                {"name": "count", "style": "count"},
                {"name": "high", "style": "rate"},
                {"name": "p_value", "style": "p_value"},
            ],
        }
    ],
}
REPLY = {
    "say": "Often.",
    "figures": {"rate": "inf", "low": None, "best": "inf", "converged": True, "count": 3},
    "tables": {
        "rates": {"label": ["inf", None], "count": [3, 0], "high": ["inf", 2.5], "p_value": [1, None]},
        "others": {"name": ["a", "-inf"], "value": [1, "-inf"]},
    },
    "heads": {"rates": {"high": "upper limit"}},
    "headline": "rate",
    "method": [{"name": "exact", "source": "Garwood 1936"}],
    "notes": [{"code": "small", "text": "Few events."}],
    "stamp": {"countsel": "0.1.0", "data": "00ff"},
    "read_as": {"ask": "how_often"},
}


class Parts(unittest.TestCase):
    def test_the_parts_are_as_they_came(self):
        answer = Answer("how_often", REPLY, ENTRY)
        self.assertEqual(str(answer), "Often.")
        for part in ("heads", "headline", "method", "notes", "stamp"):
            self.assertEqual(getattr(answer, part), REPLY[part])
        self.assertIsNone(answer.picture)
        self.assertEqual(answer.more, {"read_as": {"ask": "how_often"}})
        self.assertIn("Often.", repr(answer))

    def test_figures_are_numbers_unless_they_are_texts(self):
        figures = Answer("q", REPLY, ENTRY).figures
        self.assertEqual((figures["rate"], figures["best"], figures["count"]), (math.inf, "inf", 3))
        self.assertIs(figures["converged"], True)
        self.assertTrue(math.isnan(figures["low"]))

    def test_tables_are_frames_with_numbers_in_number_columns(self):
        tables = Answer("q", REPLY, ENTRY).tables
        rates = tables["rates"]
        self.assertIsInstance(rates, pd.DataFrame)
        self.assertEqual(list(rates["high"]), [math.inf, 2.5])
        self.assertEqual([rates[name].dtype for name in ("count", "high", "p_value")], [np.int64, float, float])
        self.assertEqual(list(rates["label"]), ["inf", None])
        self.assertEqual(list(tables["others"]["value"]), [1, -math.inf])
        self.assertEqual(list(tables["others"]["name"]), ["a", "-inf"])

    def test_without_pandas_tables_are_dicts_of_lists(self):
        with mock.patch.dict("sys.modules", {"pandas": None}):
            tables = Answer("q", REPLY, ENTRY).tables
        self.assertEqual(tables["rates"]["high"], [math.inf, 2.5])
        self.assertEqual(tables["rates"]["count"], [3, 0])
        self.assertTrue(math.isnan(tables["rates"]["p_value"][1]))

    def test_an_empty_table_has_columns(self):
        frame = Answer("q", {"tables": {"rates": {"label": [], "count": []}}}, ENTRY).tables["rates"]
        self.assertEqual((list(frame.columns), len(frame)), (["label", "count"], 0))

    def test_what_was_not_wanted_is_empty(self):
        answer = Answer("q", {"say": "Often."}, ENTRY)
        self.assertEqual((answer.figures, answer.tables, answer.notes, answer.stamp), ({}, {}, [], None))
        self.assertIn("Often.", answer._repr_html_())

    def test_answers_and_errors_can_be_pickled(self):
        answer = pickle.loads(pickle.dumps(Answer("q", REPLY, ENTRY)))
        self.assertEqual(answer.figures["count"], 3)
        refused = pickle.loads(pickle.dumps(Refused("missing", "No.", [{"column": "a", "row": 1}], "Do.", "q")))
        self.assertEqual(
            (refused.code, refused.row, str(refused), refused.question), ("missing", 1, "No. Do.", "q")
        )
        died = pickle.loads(pickle.dumps(EngineDied(-9, "q")))
        self.assertEqual((died.exit_code, died.question), (-9, "q"))


class Reader(HTMLParser):
    """What a browser would see: the tags that are open and the texts."""

    VOID = {"br"}

    def __init__(self, html):
        super().__init__()
        self.tags, self.texts, self.attributes, self.open = [], [], [], []
        self.feed(html)
        self.close()

    def handle_starttag(self, tag, attributes):
        self.tags.append(tag)
        self.attributes += attributes
        self.open.append(tag)

    def handle_endtag(self, tag):
        if self.open.pop() != tag:
            raise AssertionError(f"{tag} closes what it did not open")

    def handle_data(self, text):
        self.texts.append(text.strip())


EVIL = "</td><script>alert('&amp;\"')</script>"


class Look(unittest.TestCase):
    def test_every_text_is_escaped(self):
        plain = Reader(html_of({}))
        reply = {
            "say": EVIL,
            "figures": {EVIL: EVIL},
            "tables": {EVIL: {EVIL: [EVIL] * 50, "other": [1.5] * 50}},
            "heads": {EVIL: {"other": EVIL}},
            "shown": {EVIL: {"other": [EVIL] * 50}},
            "method": [{"name": EVIL, "source": EVIL}],
            "notes": [{"code": EVIL, "text": EVIL}],
            "stamp": {"countsel": EVIL, "data": EVIL},
        }
        read = Reader(html_of(reply))
        self.assertEqual(read.open, [])
        self.assertNotIn("script", read.tags)
        self.assertEqual(plain.tags[:1], ["style"])
        self.assertGreaterEqual(read.texts.count(EVIL), 40 * 2 + 4)
        self.assertIn(("aria-label", EVIL), read.attributes)
        self.assertNotIn("script", Reader(bar_html(0.5, EVIL)).tags)

    def test_a_table_has_its_heads_rounded_texts_and_the_rest_plain(self):
        reply = {
            "tables": {
                "t": {
                    "label": ["a"],
                    "high": ["inf"],
                    "rate": [2.3456789],
                    "count": [12345],
                    "low": [None],
                    "every": [3232.7],
                }
            },
            "heads": {"t": {"rate": "bursts per 100 km-years"}},
            "shown": {"t": {"rate": ["2.3 (1.1 to no limit)"]}},
        }
        texts = Reader(html_of(reply)).texts
        for text in ("bursts per 100 km-years", "2.3 (1.1 to no limit)", "no limit", "12,345", "3,233", "label"):
            self.assertIn(text, texts)

    def test_a_long_table_is_cut_and_says_so(self):
        html = html_of({"tables": {"t": {"n": list(range(1000))}}})
        self.assertEqual(html.count("<tr>"), 41)
        self.assertIn("960 more rows", html)


if __name__ == "__main__":
    unittest.main()
