# tests/adapters/notebook/catalogue_test.py -- are functions, signatures and docstrings read off the catalogue?
import inspect
import unittest

from support import FAKE

from countsel import Answer, Engine, Refused, UnknownArgument
from countsel.catalogue import arguments_of, call_text, doc_of, option_doc, request_of


class Functions(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.engine = Engine(FAKE)
        cls.entry = cls.engine.catalogue["echo"]

    @classmethod
    def tearDownClass(cls):
        cls.engine.close()

    def sent(self, question, *given, **keywords):
        return getattr(self.engine, question)(*given, **keywords).more["request"]

    def test_the_signature_has_the_engines_names_and_defaults(self):
        signature = inspect.signature(self.engine.echo)
        self.assertEqual(
            list(signature.parameters),
            ["data", "pips", "weight", "label", "depth", "way", "words", "want", "within_s", "progress", "only"],
        )
        self.assertEqual(signature.parameters["depth"].default, 0.5)
        self.assertEqual(signature.parameters["way"].default, "up")
        self.assertIs(signature.return_annotation, Answer)
        kinds = {parameter.kind for parameter in signature.parameters.values()}
        self.assertEqual(kinds, {inspect.Parameter.POSITIONAL_OR_KEYWORD, inspect.Parameter.KEYWORD_ONLY})

    def test_a_question_without_roles_takes_no_data(self):
        self.assertNotIn("data", inspect.signature(self.engine.linger).parameters)
        with self.assertRaises(TypeError):
            self.engine.linger({"n": [1]})

    def test_the_docstring_tells_what_the_catalogue_tells(self):
        doc = inspect.getdoc(self.engine.echo)
        for part in (
            "echo?",
            "pips    required; the pips (number)",
            "the depth (number, above 0, below 1, in fathoms)",
            "the way: 'up', 'down'",
            "one row each: label, pips, high",
            "listening  a test",
            "countsel.echo(pips=[1, 2], label=['a', 'b'], depth=0.25)",
        ):
            self.assertIn(part, doc)
        self.assertEqual(self.engine.echo.__name__, "echo")

    def test_what_is_given_is_sent_and_nothing_else(self):
        got = self.sent("echo", pips="a", depth=0.5, way=None, within_s=9, words={"events": "pips"}, want=["say"])
        del got["id"]
        self.assertEqual(
            got,
            {
                "ask": "echo",
                "of": {"pips": "a"},
                "with": {"depth": 0.5},
                "words": {"events": "pips"},
                "within_s": 9,
                "want": ["say"],
            },
        )

    def test_data_by_position_or_by_name(self):
        table = {"n": ["1"]}
        self.assertEqual(self.sent("echo", table, pips="n")["of"], self.sent("echo", data=table, pips="n")["of"])
        with self.assertRaises(TypeError):
            self.engine.echo(table, data=table)
        with self.assertRaises(TypeError):
            self.engine.echo(table, table)

    def test_only_stands_beside_the_data(self):
        got = self.sent("echo", {"n": ["1"], "k": ["a"]}, pips="n", only={"k": ["a"]})
        self.assertEqual(got["of"]["only"], {"k": ["a"]})
        self.assertNotIn("only", got)

    def test_a_name_that_python_reserves_can_still_be_given(self):
        self.assertEqual(self.sent("echo", pips=1, **{"from": "harbour"})["with"], {"from": "harbour"})

    def test_rounded_texts_come_along_for_small_tables_only(self):
        self.assertIn("shown", self.sent("echo", pips=[1, 2])["want"])
        self.assertNotIn("want", self.sent("echo", pips=list(range(10_001))))
        self.assertEqual(self.sent("echo", pips=[1], want=["say"])["want"], ["say"])

    def test_an_unknown_argument_gets_the_nearest(self):
        with self.assertRaises(UnknownArgument) as caught:
            self.engine.echo(pips=[1], wieght=[1])
        self.assertEqual((caught.exception.code, caught.exception.hint), ("unknown_key", 'Did you mean "weight"?'))
        self.assertIsInstance(caught.exception, Refused)
        self.assertIsInstance(caught.exception, TypeError)
        with self.assertRaisesRegex(UnknownArgument, "Known: .*pips"):
            self.engine.echo(zzzzzz=1)

    def test_an_unknown_question_gets_the_nearest(self):
        with self.assertRaisesRegex(AttributeError, "did you mean echo"):
            self.engine.ecko
        self.assertIn("echo", dir(self.engine))
        self.assertNotIn("cancel", dir(self.engine))

    def test_all_columns_are_sent_where_the_catalogue_says_they_are_used(self):
        self.assertEqual(
            list(self.sent("mingle", {"n": ["1"], "soil": ["x"]}, pips="n")["of"]["columns"]), ["n", "soil"]
        )

    def test_a_request_of_the_wire_is_sent_as_it_is(self):
        request = {"id": 5, "ask": "echo", "of": {"pips": [1, None]}, "with": {"way": "down"}}
        got = self.engine.ask(request).more["request"]
        self.assertEqual((got["of"], got["with"]), (request["of"], request["with"]))
        self.assertEqual(request["id"], 5)


class Examples(unittest.TestCase):
    entry = {"name": "q", "roles": [{"name": "count"}, {"name": "group"}], "options": [{"name": "per"}]}

    def test_each_form_of_a_request_as_arguments(self):
        cases = [
            ({"of": {"count": [1]}}, (None, {"count": [1]})),
            (
                {"of": {"count": [1], "soil": ["a"]}, "with": {"per": 9}},
                ({"count": [1], "soil": ["a"]}, {"per": 9}),
            ),
            (
                {
                    "of": {"columns": {"n": [1]}, "roles": {"count": "n"}, "only": {"n": [1]}},
                    "words": {"events": "e"},
                },
                ({"n": [1]}, {"count": "n", "only": {"n": [1]}, "words": {"events": "e"}}),
            ),
            ({}, (None, {})),
        ]
        for request, wanted in cases:
            self.assertEqual(arguments_of(request, self.entry), wanted)

    def test_a_range_keeps_its_origin(self):
        request = {"of": {"range": [["a"], [1]], "origin": "B4"}}
        self.assertEqual(call_text(request, self.entry), "q(countsel.Range([['a'], [1]], origin='B4'))")

    def test_roles_of_which_one_set_is_needed(self):
        entry = {
            "name": "q",
            "asks": "Q?",
            "takes_columns": False,
            "service": False,
            "either": [["a"], ["b", "c"]],
        }
        entry |= {part: [] for part in ("options", "figures", "tables", "methods", "examples")}
        entry["roles"] = [{"name": "a", "required": False, "holds": "number", "doc": "the a"}]
        self.assertIn("Needed: a or b and c.", doc_of(entry))

    def test_the_call_as_one_would_type_it(self):
        request = {"of": {"count": [1], "soil": ["a"]}, "with": {"per": 9}}
        self.assertEqual(call_text(request, self.entry), "q({'count': [1], 'soil': ['a']}, per=9)")

    def test_an_option_without_bounds(self):
        self.assertEqual(option_doc({"name": "a", "type": "text", "doc": "the a"}), "the a (text)")

    def test_none_is_not_given(self):
        self.assertEqual(request_of(self.entry, {"count": None, "per": None}), ({}, {"ask": "q"}))


if __name__ == "__main__":
    unittest.main()
