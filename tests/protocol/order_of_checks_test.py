# tests/protocol/order_of_checks_test.py -- the first trouble decides.
#
# One request holds every trouble at once; they are mended one by one, and each time the next decides.
import unittest

from wire import WireTest


class OrderOfChecks(WireTest):
    def test_one_after_the_other(self):
        line = (
            '{"id":1,"ask":"how_oftenn","nonsense":1,"of":{"held":"nowhere","roles":{"exposure":"e"},"only":{"z":[1]}},'
            '"with":{"confidence":2},"words":{"events":5}'
        )
        self.refused(line, "bad_json")
        line += "}"
        self.refused(line, "unknown_ask")
        line = line.replace("how_oftenn", "how_often")
        self.refused(line, "unknown_key")
        line = line.replace('"nonsense":1,', "")
        self.refused(line, "not_found", text="nowhere")
        line = line.replace('"held":"nowhere"', '"columns":{"c":[1,-2,3],"e":[1,1]}')
        self.refused(line, "not_found", text='"z"')
        line = line.replace(',"only":{"z":[1]}', "")
        self.refused(line, "missing", text="count")
        line = line.replace('"roles":{', '"roles":{"count":"c",')
        self.refused(line, "bad_type", text="words")
        line = line.replace(',"words":{"events":5}', "")
        self.refused(line, "bad_value", text="confidence")
        line = line.replace('"confidence":2', '"confidence":0.9')
        self.refused(line, "length_mismatch")
        line = line.replace("[1,1]", "[1,1,1]")
        self.refused(line, "bad_count", column="c", row=2)
        line = line.replace("-2", "2")
        self.answer(line)

    def test_an_unknown_key_of_with_before_the_source(self):
        self.refused({"ask": "how_often", "of": {"held": "x"}, "with": {"z": 1}}, "unknown_key")

    def test_a_file_that_may_not_be_read_before_what_is_missing(self):
        self.refused({"ask": "how_often", "of": {"file": "x.csv"}, "with": {"confidence": 7}}, "not_allowed")

    def test_missing_data_altogether(self):
        self.refused({"ask": "how_often"}, "missing", text="count")
        self.refused({"ask": "how_often", "of": {}}, "missing", text="count")
        self.refused({"ask": "which_higher", "of": {"count": [1, 2]}}, "missing", text="exposure, group")

    def test_two_forms_at_once(self):
        self.refused(
            {"ask": "how_often", "of": {"count": [1], "columns": {"count": [1]}}},
            "bad_value",
            text="more than one form",
        )
        self.refused({"ask": "how_often", "of": {"held": "a", "file": "b"}}, "bad_value")


if __name__ == "__main__":
    unittest.main()
