# tests/protocol/request_keys_test.py -- every key of a request: what it may be, and what is said otherwise.
import unittest

from wire import WireTest, how_often

ROW = {"count": 7, "exposure": 1200}


class RequestKeys(WireTest):
    def test_all_keys_together(self):
        reply = self.ask(
            {
                "id": 7,
                "ask": "how_often",
                "of": ROW,
                "with": {"per": 1000},
                "words": {"event": "burst", "events": "bursts", "exposure": "km-years", "period": "2024"},
                "want": ["say", "figures"],
                "within_s": 5,
                "progress": True,
            }
        )
        self.assertEqual(list(reply), ["id", "ask", "answer"])
        self.assertEqual(list(reply["answer"]), ["say", "figures"])
        self.assertIn("7 bursts in 1,200 km-years in 2024: 5.8 bursts per 1,000 km-years", reply["answer"]["say"])

    def test_absent_id_is_absent_in_the_reply(self):
        self.assertEqual(list(self.ask({"ask": "held"})), ["ask", "answer"])

    def test_null_is_as_good_as_absent(self):
        request = how_often(ROW, **{"with": None}, id=None, words=None, want=None, within_s=None, progress=None)
        reply = self.ask(request)
        self.assertIn("answer", reply)
        self.assertNotIn("id", reply)

    def test_of_and_with_may_be_absent(self):
        self.assertIn("answer", self.ask({"ask": "hello"}))

    def test_the_order_of_keys_does_not_matter(self):
        last = self.ask(
            '{"words":{"events":"falls"},"of":{"count":2,"exposure":9},"with":{"per":3},"ask":"how_often","id":1}'
        )
        first = self.ask(
            '{"id":1,"ask":"how_often","with":{"per":3},"of":{"exposure":9,"count":2},"words":{"events":"falls"}}'
        )
        self.assertEqual(last, first)

    def test_wrong_types(self):
        for key, value in [
            ("id", 1.5), ("id", True), ("id", [1]), ("id", {"a": 1}),
            ("of", 5), ("of", "count"), ("of", [1, 2]), ("of", True),
            ("with", 5), ("with", "per"), ("with", [1]),
            ("words", "falls"), ("words", ["falls"]), ("words", 1),
            ("want", "say"), ("want", 1), ("want", True), ("want", {"say": True}), ("want", [1]), ("want", [["say"]]),
            ("within_s", "5"), ("within_s", True), ("within_s", [5]), ("within_s", {}),
            ("progress", 1), ("progress", "true"), ("progress", []),
        ]:  # fmt: skip
            with self.subTest(key=key, value=value):
                self.refused(how_often(ROW) | {key: value}, "bad_type", text=key)

    def test_ask_of_the_wrong_type_decides_before_everything_else(self):
        for value in (5, True, ["how_often"], {"a": 1}):
            with self.subTest(value=value):
                self.refused({"ask": value, "of": 5, "nonsense": 1}, "bad_type", text="ask")

    def test_within_s_must_be_above_0(self):
        for value in (0, -1, 0.0, -1e-9):
            with self.subTest(value=value):
                self.refused(how_often(ROW, within_s=value), "bad_value", text="within_s")

    def test_a_long_time_is_no_overflow(self):
        self.assertIn("answer", self.ask(how_often(ROW, within_s=1e300)))

    def test_unknown_keys_everywhere(self):
        self.refused(how_often(ROW) | {"asks": 1}, "unknown_key", text='"asks"', hint='"ask"')
        self.refused(how_often(ROW | {"counts": 1}), "unknown_key", text='"counts"', hint='"count"')
        self.refused(how_often(ROW, **{"with": {"confidnce": 0.9}}), "unknown_key", hint='"confidence"')
        self.refused(how_often(ROW, words={"evnts": "x"}), "unknown_key", hint='"events"')
        self.refused(how_often({"columns": {"a": [1]}, "roles": {"cuont": "a"}}), "unknown_key", hint='"count"')
        self.refused(
            how_often(ROW, **{"with": {"limits": "bayes", "prior": {"scale": 1}}}), "unknown_key", text="prior"
        )
        self.refused(how_often({"count": {"f46": ""}}), "unknown_key", column="count", hint="f64")
        self.refused({"ask": "hello", "of": {"line": "x"}}, "unknown_key", text='"line"')
        self.refused({"ask": "quick", "of": {"line": "7"}, "with": {"per": 1}}, "unknown_key", text='"per"')
        self.refused({"ask": "held", "of": {"columns": {"a": [1]}}}, "unknown_key", text='"columns"')

    def test_an_unknown_question_gets_the_nearest(self):
        self.refused({"ask": "how_oftn"}, "unknown_ask", text='"how_oftn"', hint='"how_often"')
        self.refused({"ask": "which_is_higher"}, "unknown_ask", hint='"which_higher"')
        self.refused({"ask": "zzzzzz"}, "unknown_ask", hint="questions")
        self.refused({"ask": ""}, "unknown_ask")
        self.refused({}, "unknown_ask")

    def test_words_are_texts(self):
        self.refused(how_often(ROW, words={"events": 5}), "bad_type", text="words.events")
        self.answer(how_often(ROW, words={"events": None}))

    def test_a_part_that_no_answer_has(self):
        self.refused(how_often(ROW, want=["say", "figurs"]), "bad_value", text='"figurs"', hint='"figures"')

    def test_what_is_quoted_in_a_refusal_is_short(self):
        long = "x" * 100_000
        for request in (
            {"ask": long},
            how_often(ROW) | {long: 1},
            how_often(ROW, **{"with": {long: 1}}),
            how_often(ROW, **{"with": {"per": long}}),
            how_often(ROW, **{"with": {"limits": long}}),
            how_often(ROW) | {"of": long},
            how_often({"count": [long]}),
            how_often({"held": long}),
            how_often(ROW | {"origin": long}),
            how_often({"columns": {"a": [1]}, "roles": {"count": long}}),
            {"ask": "cancel", "of": {"id": long}},
        ):
            reply = self.ask(request)
            self.assertLess(len(str(reply["refused"])), 1000)
        # … and no character is cut in two.
        self.refused(how_often(ROW, **{"with": {"per": "ä" * 100}}), "bad_type", text="ä…")


if __name__ == "__main__":
    unittest.main()
