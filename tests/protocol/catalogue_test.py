# tests/protocol/catalogue_test.py -- does every question keep what its declaration says?
import functools
import json
import re
import unittest

from wire import WireTest

SNAKE = re.compile(r"[a-z][a-z0-9]*(_[a-z0-9]+)*")
# What else must be asked for every declared figure and table to be there at least once.
EXTRA = {
    "which_higher": [{"with": {"margin": 1.5}}],
    "what_drives": [{"with": {"terms": ["age"], "covariance": True}}],
    "same_mix": [{"of": {"count": [3, 4], "exposure": [9, 8], "stratum": ["a", "b"]}, "with": {}}],
}


def for_each(services=True):
    """Runs a test once for each question of the catalogue."""

    def decorate(test):
        @functools.wraps(test)
        def each(self):
            for question in self.questions:
                if services or not question["service"]:
                    with self.subTest(question["name"]):
                        test(self, question)

        return each

    return decorate


class Catalogue(WireTest):
    @classmethod
    def setUpClass(cls):
        super().setUpClass()
        cls.questions = cls.server.ask({"ask": "questions"})["answer"]["questions"]

    def answered_examples(self, question):
        """Each example with its answer; what it needs held is held first."""
        for example in question["examples"]:
            if example["ask"] == "release":
                continue
            yield example, self.answer(example)

    def test_names_are_unique_and_snake_case(self):
        names = [question["name"] for question in self.questions]
        self.assertEqual(len(names), len(set(names)))
        self.assertLessEqual(
            {"how_often", "which_higher", "what_drives", "hello", "questions", "quick", "hold", "held"}, set(names)
        )
        for question in self.questions:
            self.assertTrue(SNAKE.fullmatch(question["name"]))
            for part in ("roles", "options", "figures", "tables"):
                own = [entry["name"] for entry in question[part]]
                self.assertEqual(len(own), len(set(own)), part)
                for name in own:
                    self.assertTrue(SNAKE.fullmatch(name), name)
            for table in question["tables"]:
                columns = [column["name"] for column in table["columns"]]
                self.assertEqual(len(columns), len(set(columns)))

    @for_each()
    def test_what_it_asks_is_a_line(self, question):
        self.assertLessEqual(len(question["asks"]), 79)
        self.assertTrue(question["asks"].endswith("." if question["service"] else "?"), question["asks"])

    @for_each()
    def test_everything_is_explained(self, question):
        for part in ("roles", "options", "figures", "tables"):
            for entry in question[part]:
                self.assertTrue(entry["doc"], entry)
        for method in question["methods"]:
            self.assertRegex(method["source"], r"\d{4}", method)
        if not question["service"]:
            self.assertTrue(question["methods"] and question["figures"] and question["tables"])

    @for_each(services=False)
    def test_a_headline_is_a_declared_figure(self, question):
        if question["headline"] is not None:
            self.assertIn(question["headline"], [figure["name"] for figure in question["figures"]])

    @for_each()
    def test_every_example_is_answered(self, question):
        if question["name"] in ("cancel", "goodbye", "release"):
            return
        self.assertTrue(question["examples"])
        for example, answer in self.answered_examples(question):
            self.assertEqual(example["ask"], question["name"])
            self.assertTrue(answer["say"])

    def all_answers(self, question):
        """Answers to the examples, to the first with each choice of each option, and to what EXTRA asks."""
        requests = list(question["examples"])
        for option in question["options"]:
            requests += [self.with_option(question, option["name"], choice) for choice in option.get("allowed", [])]
        requests += [question["examples"][0] | extra for extra in EXTRA.get(question["name"], [])]
        replies = [self.ask(request) for request in requests]
        return [reply["answer"] for reply in replies if "answer" in reply]

    @for_each(services=False)
    def test_answers_have_the_figures_and_tables_declared(self, question):
        figures = [figure["name"] for figure in question["figures"]]
        tables = {table["name"]: [column["name"] for column in table["columns"]] for table in question["tables"]}
        seen = set()
        for answer in self.all_answers(question):
            there = list(answer["figures"])
            self.assertEqual(there, [name for name in figures if name in there], "not declared, or not in that order")
            self.assertEqual(list(answer["tables"]), [name for name in tables if name in answer["tables"]])
            self.assertEqual(list(answer["heads"]), list(answer["tables"]))
            for name, columns in answer["tables"].items():
                if name == "covariance":  # a column for each coefficient
                    self.assertEqual(list(columns), ["coefficient", *columns["coefficient"]])
                else:
                    self.assertEqual(list(columns), [column for column in tables[name] if column in columns], name)
                self.assertEqual(list(answer["heads"][name]), list(columns))
                self.assertTrue(all(answer["heads"][name].values()))
                self.assertEqual(len({len(cells) for cells in columns.values()}), 1, name)
                seen |= {(name, column) for column in columns}
            seen |= set(there) | set(answer["tables"])
        if question["name"] == "do_they_differ":
            figures = set(figures) - {"p_error"}  # only where there are too many outcomes to look at all
        self.assertEqual(set(figures) - seen, set())
        self.assertEqual(set(tables) - seen, set())
        self.assertEqual({(name, column) for name in tables for column in tables[name]} - seen, set())

    @for_each(services=False)
    def test_every_default_is_accepted_when_it_is_sent(self, question):
        for example in question["examples"][:1]:
            plain = self.answer(example)
            sent = {option["name"]: option["default"] for option in question["options"]} | example.get("with", {})
            answer = self.answer(example | {"with": sent})
            self.assertEqual(answer["figures"], plain["figures"])
            self.assertEqual(answer["tables"], plain["tables"])
            self.assertEqual(answer["stamp"], plain["stamp"])

    def with_option(self, question, name, value):
        example = question["examples"][0]
        return example | {"with": example.get("with", {}) | {name: value}}

    @for_each(services=False)
    def test_what_is_just_outside_a_bound_is_refused(self, question):
        for option in question["options"]:
            name = option["name"]
            step = 1 if option["type"] == "whole" else 1e-9
            outside = [option[bound] for bound in ("above", "below") if bound in option]
            outside += [option["from"] - step] if "from" in option else []
            outside += [option["to"] + step] if "to" in option else []
            for value in outside:
                self.refused(self.with_option(question, name, value), "bad_value", text=name)
            if option["type"] == "whole":
                self.refused(self.with_option(question, name, 1.5), "bad_value", text=name)

    @for_each(services=False)
    def test_options_of_the_wrong_type(self, question):
        wrong = {
            "number": ["5", True, [1], {}], "whole": ["5", True, [1]], "boolean": [1, "true", []], "text": [5, True, []],
            "choice": [5, True, ["exact"], {}], "level": [[], {}], "object": [5, "x", [1]],
        }  # fmt: skip
        for option in question["options"]:
            for value in wrong.get(option["type"], [{"nonsense": [1]}]):
                reply = self.ask(self.with_option(question, option["name"], value))
                self.assertIn("refused", reply, (option["name"], value))
                allowed = ("bad_type",) if option["type"] in wrong else ("bad_type", "bad_value", "unknown_key")
                self.assertIn(reply["refused"]["code"], allowed, (option["name"], value, reply))

    @for_each(services=False)
    def test_an_unknown_choice_gets_the_nearest_or_all(self, question):
        for option in question["options"]:
            if option["type"] == "choice":
                if option["default"] is not None:
                    self.assertIn(option["default"], option["allowed"])
                refusal = self.refused(
                    self.with_option(question, option["name"], "zzzzzzzz"), "bad_value", text=option["name"]
                )
                for choice in option["allowed"]:
                    self.assertIn(json.dumps(choice), refusal["text"])

    @for_each(services=False)
    def test_every_choice_is_answered_or_refused_for_a_reason(self, question):
        for option in question["options"]:
            for choice in option.get("allowed", []):
                reply = self.ask(self.with_option(question, option["name"], choice))
                if "refused" in reply:
                    self.assertIn(
                        reply["refused"]["code"],
                        ("missing", "too_few", "no_answer", "bad_value"),
                        (option["name"], choice, reply),
                    )

    @for_each(services=False)
    def test_missing_roles(self, question):
        for role in question["roles"]:
            if role["required"]:
                of = {other["name"]: [1, 2] for other in question["roles"] if other["required"] and other != role}
                self.refused({"ask": question["name"], "of": of}, "missing", text=role["name"])

    @for_each()
    def test_one_question_by_name(self, question):
        self.assertEqual(self.answer({"ask": "questions", "with": {"name": question["name"]}})["questions"], [question])

    def test_no_question_by_name(self):
        self.refused({"ask": "questions", "with": {"name": "how_oftn"}}, "not_found", hint='"how_often"')

    @for_each()
    def test_the_catalogue_is_a_stable_document(self, question):
        parts = "name asks service takes_columns roles either options figures tables methods headline examples".split()
        self.assertEqual(list(question), [part for part in parts if part in question])
        self.assertLessEqual(set(parts) - {"either"}, set(question))
        for option in question["options"]:
            self.assertEqual(list(option)[:3], ["name", "type", "default"])
            if option["type"] == "whole" and option["default"] is not None:
                self.assertIsInstance(option["default"], int)


if __name__ == "__main__":
    unittest.main()
