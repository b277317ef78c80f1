# tests/protocol/files_test.py -- tables from files, and the fence round the folder they may lie in.
import os
import tempfile
import unittest
from pathlib import Path

from wire import Server, WireTest, how_often

ROLES = {"count": "bursts", "exposure": "km_years"}


class Files(WireTest):
    @classmethod
    def setUpClass(cls):
        cls.around = tempfile.TemporaryDirectory()
        around = Path(cls.around.name)
        cls.folder = around / "tables"
        (cls.folder / "deep").mkdir(parents=True)
        (around / "secret.csv").write_text("bursts,km_years\n99,1\n")
        (around / "tables-too").mkdir()
        (around / "tables-too" / "secret.csv").write_text("bursts,km_years\n99,1\n")
        cls.write("mains.csv", "material,bursts,km_years\niron,3,12.5\npvc,0,9\n")
        cls.write("deep/mains.csv", "bursts,km_years\n7,1\n")
        (cls.folder / "inner.csv").symlink_to("deep/mains.csv")
        (cls.folder / "outer.csv").symlink_to(around / "secret.csv")
        (cls.folder / "relative.csv").symlink_to("../secret.csv")
        (cls.folder / "way").symlink_to(around)
        (cls.folder / "nowhere.csv").symlink_to(around / "none.csv")
        (cls.folder / "round.csv").symlink_to("round.csv")
        os.mkfifo(cls.folder / "fifo.csv")
        cls.arguments = ("--files", str(cls.folder))
        super().setUpClass()

    @classmethod
    def tearDownClass(cls):
        super().tearDownClass()
        cls.around.cleanup()

    @classmethod
    def write(cls, name, text):
        path = cls.folder / name
        path.write_bytes(text if isinstance(text, bytes) else text.encode())

    def counted(self, name, **rest):
        return self.answer(how_often({"file": name, "roles": ROLES}, **rest))["figures"]["count"]

    def test_a_file_below_the_folder(self):
        self.assertEqual(self.counted("mains.csv"), 3)
        self.assertEqual(self.counted("./mains.csv"), 3)
        self.assertEqual(self.counted("deep/mains.csv"), 7)
        self.assertEqual(self.counted("deep/../mains.csv"), 3)
        self.assertEqual(self.counted("inner.csv"), 7)

    def test_what_lies_outside(self):
        for name in (
            "../secret.csv", "deep/../../secret.csv", str(self.folder / "mains.csv"), "/etc/passwd", "outer.csv", "relative.csv",
            "way/secret.csv", "../tables/mains.csv", "../tables-too/secret.csv", "/dev/zero", "/dev/stdin", "/proc/self/environ",
        ):  # fmt: skip
            with self.subTest(name):
                refusal = self.refused(how_often({"file": name, "roles": ROLES}), "not_allowed")
                self.assertNotIn(str(self.folder.parent), refusal["text"].replace(name, ""))

    def test_what_is_not_there_looks_the_same_outside_as_what_is(self):
        there = self.refused(how_often({"file": "../secret.csv", "roles": ROLES}), "not_allowed")
        not_there = self.refused(how_often({"file": "../secrex.csv", "roles": ROLES}), "not_allowed")
        self.assertEqual(there["text"].replace("secret", "secrex"), not_there["text"])

    def test_what_is_no_file(self):
        self.refused(how_often({"file": "none.csv", "roles": ROLES}), "not_found", text='"none.csv"')
        self.refused(how_often({"file": "nowhere.csv", "roles": ROLES}), "not_found")
        self.refused(how_often({"file": "round.csv", "roles": ROLES}), "not_found")
        self.refused(how_often({"file": "mains.csv/x", "roles": ROLES}), "not_found")
        for name in ("fifo.csv", "deep", ".", ""):
            with self.subTest(name):
                self.refused(how_often({"file": name, "roles": ROLES}), "not_allowed")
        self.refused(how_often({"file": "a\0b", "roles": ROLES}), "not_allowed")
        self.refused(how_often({"file": "x" * 5000, "roles": ROLES}), "not_found")

    def test_no_folder_no_files(self):
        with Server() as server:
            reply = server.ask(how_often({"file": "mains.csv"}))
            self.assertEqual(reply["refused"]["code"], "not_allowed")
            self.assertIn("--files", reply["refused"]["hint"])
        with Server("--files", "/nonexistent") as server:
            self.assertEqual(server.ask(how_often({"file": "mains.csv"}))["refused"]["code"], "not_found")

    def test_a_file_larger_than_a_line_may_be(self):
        with Server("--files", str(self.folder), "--max-line", "200") as server:
            self.write("large.csv", "count\n" + "1\n" * 100)
            self.assertEqual(server.ask(how_often({"file": "large.csv"}))["refused"]["code"], "too_large")

    # RFC 4180

    def table(self, text, **rest):
        self.write("t.csv", text)
        return how_often({"file": "t.csv"} | rest)

    def test_quotes_commas_and_line_ends(self):
        text = '\ufefflabel,count\r\n"iron, cast",1\r\n"say ""hi""",2\r\n"two\r\nlines",4\r\n"",8\r\n'
        answer = self.answer(self.table(text))
        self.assertEqual(answer["tables"]["rates"]["label"], ["iron, cast", 'say "hi"', "two\r\nlines", ""])
        self.assertEqual(answer["figures"]["count"], 15)

    def test_without_a_last_line_end(self):
        self.assertEqual(self.answer(self.table("count\n1\n2"))["figures"]["count"], 3)

    def test_without_a_header(self):
        request = self.table("iron,1\npvc,2\n", header=False, roles={"label": "1", "count": "2"})
        self.assertEqual(self.answer(request)["figures"]["count"], 3)

    def test_headers_left_blank_are_numbered(self):
        request = self.table(",bursts,\niron,1,\npvc,2,\n", roles={"count": "bursts", "label": "1"})
        self.assertEqual(self.answer(request)["tables"]["rates"]["label"], ["iron", "pvc"])

    def test_rows_of_another_length(self):
        self.refused(self.table("label,count\na,1\nb\nc,3\n"), "length_mismatch", row=2, text="Row 2 has 1 cell")
        self.refused(self.table("label,count\na,1\nb,2,3\n"), "length_mismatch", row=2, text="Row 2 has 3 cells")

    def test_a_quote_out_of_place(self):
        for text in ('count\n1\n"2\n', 'label,count\na"b,1\n', 'label,count\n"a"b,1\n'):
            with self.subTest(text):
                self.refused(self.table(text), "bad_value", text="quote")

    def test_what_is_no_text(self):
        for text in (b"count\n\xff\n", b"count\n1\0\n", "count\n1\n".encode("utf-16")):
            self.refused(self.table(text), "bad_json", text="UTF-8")

    def test_empty_files(self):
        self.refused(self.table(""), "missing")
        self.refused(self.table("count\n"), "too_few")

    def test_two_columns_of_one_name(self):
        self.refused(self.table("count,count\n1,2\n"), "bad_value", text='"count"')

    def test_numbers_are_numbers_and_other_texts_stay(self):
        text = "label,count,exposure\n007,1,1e3\n1.50,2,0.5\n+3,3, 4 \n"
        answer = self.answer(self.table(text))
        self.assertEqual(answer["tables"]["rates"]["label"], ["007", "1.5", "+3"])
        self.assertEqual(answer["figures"]["exposure"], 1004.5)
        self.refused(self.table("count\n9007199254740993\n"), "bad_count", row=1)

    def test_a_decimal_comma(self):
        text = 'count,exposure\n1,"3,5"\n2,"1.200,5"\n3,1.200\n'
        self.refused(self.table(text), "bad_value", column="exposure", row=1)
        answer = self.answer(self.table(text) | {"with": {"decimal": ","}})
        self.assertEqual(answer["tables"]["rates"]["exposure"], [3.5, 1200.5, 1200])

    def test_points_that_could_be_thousands_marks_are_said(self):
        doubtful, sure = "count,exposure\n1,1.200\n2,3\n", "count,exposure\n1,1.200\n2,0.500\n"
        self.note(self.answer(self.table(doubtful)), "decimal_point")
        self.no_note(self.answer(self.table(sure)), "decimal_point")
        answer = self.answer(self.table(doubtful) | {"with": {"decimal": "."}})
        self.no_note(answer, "decimal_point")
        self.assertEqual(answer["figures"]["exposure"], 4.2)
        answer = self.answer(self.table(doubtful) | {"with": {"thousands": "."}})
        self.assertEqual(answer["figures"]["exposure"], 1203)
        self.write("t.csv", doubtful)
        self.answer({"ask": "hold", "of": {"file": "t.csv"}, "with": {"name": "t"}})
        self.note(self.answer(how_often({"held": "t"})), "decimal_point")
        self.refused(how_often({"held": "t"}, **{"with": {"decimal": ","}}), "bad_value", column="exposure")

    def test_more_columns_than_a_table_may_have(self):
        self.refused(self.table(",".join(f"c{i}" for i in range(16_385)) + "\n"), "too_large")


if __name__ == "__main__":
    unittest.main()
