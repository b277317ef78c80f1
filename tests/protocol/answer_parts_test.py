# tests/protocol/answer_parts_test.py -- the parts of an answer: which are sent, and what they hold.
import json
import math
import unittest

from wire import WireTest, exchange, how_often, packed, run

PARTS = ["say", "figures", "tables", "heads", "shown", "headline", "picture", "method", "notes", "stamp"]
OF = {"count": [3, 0, 5], "exposure": [1200, 800, 1500], "label": ["North", "East", "South"]}
WORDS = {"event": "fall", "events": "falls", "exposure": "bed-days"}


class Parts(WireTest):
    def test_all_but_shown_by_default_in_this_order(self):
        self.assertEqual(list(self.answer(how_often(OF))), [part for part in PARTS if part != "shown"])

    def test_the_parts_wanted_and_no_other(self):
        for part in PARTS:
            self.assertEqual(list(self.answer(how_often(OF, want=[part]))), [part])
        self.assertEqual(list(self.answer(how_often(OF, want=["stamp", "say", "say"]))), ["say", "stamp"])
        self.assertEqual(self.answer(how_often(OF, want=[])), {})

    def test_heads_name_the_unit(self):
        heads = self.answer(how_often(OF, words=WORDS, **{"with": {"per": 1000}}))["heads"]["rates"]
        self.assertEqual(heads["rate"], "falls per 1,000 bed-days")
        self.assertEqual(heads["exposure"], "bed-days")
        self.assertEqual(heads["low"], "lower 95% limit")
        self.assertEqual(self.answer(how_often(OF, words=WORDS))["heads"]["rates"]["rate"], "falls per bed-day")

    def test_heads_and_shown_have_the_columns_of_the_tables(self):
        answer = self.answer(how_often(OF, want=["tables", "heads", "shown"]))
        for table, columns in answer["tables"].items():
            self.assertEqual(list(answer["heads"][table]), list(columns))
            self.assertEqual(list(answer["shown"][table]), list(columns))
            lengths = {len(cells) for cells in [*columns.values(), *answer["shown"][table].values()]}
            self.assertEqual(lengths, {3})
            self.assertTrue(all(isinstance(text, str) for cells in answer["shown"][table].values() for text in cells))

    def test_shown_is_rounded_to_what_the_limits_support(self):
        of = {"count": [7], "exposure": [1200]}
        answer = self.answer(how_often(of, want=["shown"], **{"with": {"per": 1000}}))
        self.assertEqual(answer["shown"]["rates"]["rate"], ["5.8 (2.3 to 12.0)"])

    def test_the_headline_is_a_figure(self):
        answer = self.answer(how_often(OF))
        self.assertIn(answer["headline"], answer["figures"])

    def test_methods_and_their_sources(self):
        for method in self.answer(how_often(OF))["method"]:
            self.assertEqual(list(method), ["name", "source"])
            self.assertRegex(method["source"], r"\d{4}")

    def test_the_stamp(self):
        stamp = self.answer(how_often(OF))["stamp"]
        version = self.answer({"ask": "hello"})["figures"]["version"]
        self.assertEqual(stamp["countsel"], version)
        self.assertRegex(stamp["data"], "^[0-9a-f]{16}$")

    def test_undefined_and_unbounded(self):
        figures = self.answer(how_often({"count": 0, "exposure": 10}))["figures"]
        self.assertEqual((figures["low"], figures["every"], figures["every_high"]), (0, "inf", "inf"))
        figures = self.answer(how_often({"count": 3, "exposure": 10}, **{"with": {"side": "lower"}}))["figures"]
        self.assertEqual(figures["high"], "inf")
        answer = self.answer(how_often({"count": 0, "exposure": 10}, **{"with": {"limits": "log-wald"}}))
        self.assertEqual((answer["figures"]["low"], answer["figures"]["high"]), (None, None))
        self.note(answer, "no_limits")

    def test_numbers_read_back_the_same(self):
        values = [
            0.1,
            1 / 3,
            1e-300,
            5e-324,
            1.7976931348623157e308,
            123456789.123456789,
            2**53 - 1,
            2**53 + 2,
            1e22,
            4.35,
        ]
        answer = self.answer(how_often({"count": [0] * len(values), "exposure": values}, want=["tables"]))
        self.assertEqual(answer["tables"]["rates"]["exposure"], values)

    def test_never_a_nan_on_the_wire(self):
        def refuse(name):
            raise AssertionError(f"{name} on the wire")

        extremes = [
            {"count": [0, 2**53], "exposure": [1e-308, 1e308]},
            {"count": [1e15, 1], "exposure": [1e-300, 1e300]},
            {"count": 0},
        ]
        for limits in (
            "exact",
            "mid-p",
            "score",
            "likelihood",
            "jeffreys",
            "byar",
            "wald",
            "log-wald",
            "square-root",
            "bayes",
        ):
            for of in extremes:
                line = json.dumps(how_often(of, **{"with": {"limits": limits}})).encode()
                json.loads(run(line).stdout, parse_constant=refuse)

    def test_control_characters_and_all_of_unicode_come_back(self):
        labels = ["\u0001\u001f", 'say "hi" \\ /', "\n\r\t\b\f", "\u007f\u0080\u2028\ufeff\uffff", "é😀", "𐀀"]
        answer = self.answer(how_often({"count": [1] * len(labels), "label": labels}))
        self.assertEqual(answer["tables"]["rates"]["label"], labels)


class Pictures(WireTest):
    def picture(self, rows):
        of = {"count": [i % 11 for i in range(rows)], "exposure": [10] * rows, "label": [f"u{i}" for i in range(rows)]}
        return self.answer(how_often(of, want=["picture", "notes", "tables"]))

    def test_its_shape(self):
        answer = self.picture(5)
        picture = answer["picture"]
        self.assertEqual(list(picture), ["kind", "title", "x", "y", "series", "lines"])
        self.assertEqual(picture["kind"], "limits")
        for series in picture["series"]:
            self.assertIn(series["role"], ("points", "line", "steps", "band", "bars"))
            for part in ("y", "low", "high"):
                self.assertEqual(len(series[part]), len(picture["x"]["labels"]))
        self.no_note(answer, "picture_thinned")

    def test_two_thousand_points_are_drawn_beyond_that_it_is_thinned_and_says_so(self):
        self.no_note(self.picture(2000), "picture_thinned")
        for rows in (2001, 2500, 100_000):
            answer = self.picture(rows)
            picture = answer["picture"]
            labels = picture["x"]["labels"]
            self.assertEqual(len(labels), 2000)
            self.assertEqual((labels[0], labels[-1]), ("u0", f"u{rows - 1}"))
            self.assertEqual(len(set(labels)), 2000)
            self.assertIn("2,000 of ", self.note(answer, "picture_thinned")["text"])
            self.assertEqual(len(answer["tables"]["rates"]["count"]), rows)
            drawn = dict(zip(labels, picture["series"][0]["y"]))
            table = dict(zip(answer["tables"]["rates"]["label"], answer["tables"]["rates"]["rate"]))
            self.assertTrue(all(math.isclose(table[label], y) for label, y in drawn.items()))


class Progress(unittest.TestCase):
    def test_progress_lines_only_where_asked_for_and_only_before_the_reply(self):
        rows = 100_000
        columns = {"count": packed(i % 4 for i in range(rows))}
        for name, levels, step in (("zone", 30, 17), ("soil", 20, 11)):
            columns[name] = {
                "levels": [f"{name}{k}" for k in range(levels)],
                "codes": [i * step % levels for i in range(rows)],
            }
        ask = {
            "ask": "what_drives",
            "of": {"held": "t"},
            "with": {"terms": ["zone", "soil", {"cross": ["zone", "soil"]}]},
        }
        hold = {"ask": "hold", "of": {"columns": columns}, "with": {"name": "t"}}
        replies = exchange([hold, ask | {"id": 1, "progress": True}, ask | {"id": 2}], "--workers", "1")
        told = [reply for reply in replies if "progress" in reply]
        self.assertTrue(told)
        for reply in told:
            self.assertEqual(list(reply), ["id", "progress"])
            self.assertEqual(list(reply["progress"]), ["share", "doing"])
            self.assertEqual(reply["id"], 1)
            self.assertTrue(reply["progress"]["doing"])
        shares = [reply["progress"]["share"] for reply in told]
        self.assertEqual(shares, sorted(shares))
        self.assertTrue(all(0 <= share <= 1 for share in shares))
        self.assertEqual([reply.get("id") for reply in replies], [None] + [1] * len(told) + [1, 2])


if __name__ == "__main__":
    unittest.main()
