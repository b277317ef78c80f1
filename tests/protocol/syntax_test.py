# tests/protocol/syntax_test.py -- bad lines cost one line each; what is no line costs nothing.
import json
import unittest

from wire import PATIENCE, WireTest, run

HELD = b'{"id":"after","ask":"held"}'


def nested(depth, around='{"ask":"how_often","of":{"count":%s}}'):
    """A request in which lists nest until `depth` levels are reached, its own two objects among them."""
    before = around.split("%s")[0]
    lists = depth - before.count("{") + before.count("}")
    return (around % ("[" * lists + "]" * lists)).encode()


class Syntax(WireTest):
    def survives(self, line, code, **wanted):
        """The line gets its one refusal and the next line its answer."""
        refusal = self.refused(line, code, **wanted)
        self.assertEqual(self.ask(HELD)["id"], "after")
        return refusal

    def test_what_is_no_json(self):
        for line in (
            b"{", b"}", b'{"ask":', b'{"ask":"held"', b'{"ask":"held"}}', b'{"ask":"held"} x', b'{"ask":"held"}{"ask":"held"}',
            b"{'ask':'held'}", b'{ask:"held"}', b'{"ask":"held",}', b'{"ask" "held"}', b'{"ask":"he\tld"}', b'{"ask":"held"}//',
            b'{"ask":"how_often","of":{"count":[1,]}}', b'{"ask":"how_often","of":{"count":[01]}}', b'{"of":{"count":[.5]}}',
            b'{"of":{"count":[1.]}}', b'{"of":{"count":[+1]}}', b'{"of":{"count":[NaN]}}', b'{"of":{"count":[Infinity]}}',
            b'{"of":{"count":[0x10]}}', b'{"of":{"count":[1 2]}}', b'{"of":{"count":[tru]}}', b'{"ask":"\\x"}',
            b'{"ask":"\\u12"}', b'{"ask":"\\ud800"}', b'{"ask":"\\udc00\\ud800"}', b"nonsense", b"\x01", b"\xe2\x80\xa8",
        ):  # fmt: skip
            with self.subTest(line):
                self.survives(line, "bad_json")

    def test_what_is_json_but_no_object(self):
        for line in (b"5", b'"text"', b"[]", b'[{"ask":"held"}]', b"null", b"true", b"-1.5e3"):
            with self.subTest(line):
                self.survives(line, "not_an_object", hint='{"ask":"hello"}')

    def test_a_nul_anywhere(self):
        for line in (
            b'\0{"ask":"held"}',
            b'{"ask":"he\0ld"}',
            b'{"ask":"held"}\0',
            b'{"ask":\0"held"}',
            b"\0",
            b'{"a\0":1}',
        ):
            with self.subTest(line):
                self.survives(line, "bad_json")

    def test_invalid_utf8(self):
        for bad in (
            b"\xff",
            b"\xc3",
            b"\xc3(",
            b"\xc0\xaf",
            b"\xe0\x80\xaf",
            b"\xed\xa0\x80",
            b"\xf4\x90\x80\x80",
            b"\x80",
        ):
            with self.subTest(bad):
                self.survives(b'{"ask":"held","id":"' + bad + b'"}', "bad_json", text="UTF-8")
                self.survives(b'{"ask":"held",' + bad + b"}", "bad_json")

    def test_keys_given_twice(self):
        for line in (
            '{"ask":"held","ask":"held"}',
            '{"ask":"held","\\u0061sk":"held"}',
            '{"ask":"how_often","of":{"count":[1],"count":[1]}}',
            '{"ask":"how_often","of":{"columns":{"a":[1],"a":[2]}}}',
            '{"ask":"how_often","with":{"per":1,"per":1}}',
            '{"ask":"how_often","with":{"prior":{"shape":1,"shape":1}}}',
            '{"ask":"how_often","of":{"roles":{"count":"a","count":"a"}}}',
            '{"ask":"how_often","words":{"event":"a","event":"a"}}',
            '{"ask":"how_often","of":{"count":{"f64":"","f64":""}}}',
            '{"ask":"how_often","of":{"count":[{"a":1,"a":1}]}}',
            '{"ask":"how_often","of":{"range":[[{"a":1,"a":1}]]}}',
            '{"ask":"how_often","nonsense":{"b":{"a":1,"a":1}}}',
        ):
            with self.subTest(line):
                self.survives(line, "bad_json", text="twice")

    def test_the_same_key_in_two_objects_is_no_trouble(self):
        request = {"ask": "how_often", "of": {"columns": {"count": [1], "columns": [2], "range": [3], "held": [4]}}}
        self.assertEqual(self.answer(request)["figures"]["count"], 1)

    def test_nesting(self):
        self.survives(nested(64), "bad_type")
        self.survives(nested(65), "too_deep", text="64")
        self.survives(nested(10_000), "too_deep")
        self.survives(b"[" * 10_000, "not_an_object")
        self.survives(b'{"a":' * 10_000, "too_deep")
        self.survives(nested(64, '{"ask":"how_often","of":{"count":1},"with":{"prior":%s}}'), "bad_type")
        self.survives(nested(65, '{"ask":"how_often","of":{"count":1},"with":{"prior":%s}}'), "too_deep")
        self.survives(nested(65, '{"ask":"how_often","of":{"range":%s}}'), "too_deep")
        self.survives(nested(65, '{"nonsense":%s}'), "too_deep")

    def test_numbers_too_large_to_be_read(self):
        for line in ('{"ask":"how_often","of":{"count":[1e999]}}', '{"ask":"how_often","with":{"per":-1e400}}'):
            self.survives(line, "bad_json", text="too large")
        self.assertEqual(
            self.answer('{"ask":"how_often","of":{"count":[0],"exposure":[1e308]}}')["figures"]["count"], 0
        )
        self.assertEqual(
            self.answer('{"ask":"how_often","of":{"count":[1],"exposure":[1e-308]}}')["figures"]["rate"], 1e308
        )

    def test_more_keys_columns_or_values_than_a_request_has_use_for(self):
        many = ",".join(f'"k{i}":1' for i in range(100_001))
        self.survives('{"ask":"held","with":{%s}}' % many, "too_large")
        self.survives("{%s}" % many, "too_large")
        columns = ",".join(f'"k{i}":[1]' for i in range(16_385))
        self.survives('{"ask":"how_often","of":{"columns":{%s}}}' % columns, "too_large")
        self.survives('{"ask":"how_often","of":{"range":[[%s]]}}' % ("1," * 16_384 + "1"), "too_large")
        self.survives('{"ask":"how_often","of":{"only":{"a":[%s]}}}' % ("1," * 1_000_000 + "1"), "too_large")

    def test_a_row_of_a_million_surplus_cells(self):
        line = '{"ask":"how_often","of":{"range":[["count"],[1],[%s1]]}}' % ("1," * 1_000_000)
        self.survives(line, "length_mismatch", text="1000001 cells", row=2)


class Lines(unittest.TestCase):
    def replies(self, data):
        done = run(data)
        self.assertEqual((done.returncode, done.stderr), (0, b""))
        return [json.loads(line) for line in done.stdout.splitlines()]

    def test_empty_lines_are_passed_over(self):
        self.assertEqual(self.replies(b""), [])
        self.assertEqual(self.replies(b"\n\n \n\t\n\r\n  \r\n\n"), [])
        self.assertEqual(len(self.replies(b"\n" + HELD + b"\n\n\n" + HELD + b"\n   ")), 2)

    def test_a_trailing_carriage_return_is_tolerated(self):
        self.assertEqual(len(self.replies(HELD + b"\r\n" + HELD + b"\r\n")), 2)

    def test_a_last_line_without_its_end_counts(self):
        self.assertEqual(len(self.replies(HELD)), 1)
        self.assertEqual(len(self.replies(HELD + b"\n" + HELD)), 2)
        self.assertEqual(self.replies(b'{"ask":"he')[0]["refused"]["code"], "bad_json")

    def test_a_byte_order_mark_at_the_very_start_only(self):
        mark = b"\xef\xbb\xbf"
        self.assertEqual(self.replies(mark), [])
        self.assertIn("answer", self.replies(mark + HELD)[0])
        self.assertIn("answer", self.replies(mark + b"\n" + HELD)[0])
        for data in (mark + mark + HELD, b" " + mark + HELD, b"\xef" + HELD, b"\xef\xbb" + HELD, b"\xef", b"\xef\xbb"):
            with self.subTest(data):
                self.assertEqual([reply["refused"]["code"] for reply in self.replies(data)], ["bad_json"])
        later = self.replies(HELD + b"\n" + mark + HELD + b"\n" + HELD)
        self.assertEqual(["answer" in reply for reply in later], [True, False, True])
        self.assertEqual(later[1]["refused"]["code"], "bad_json")

    def test_a_line_just_as_long_as_allowed(self):
        for spare, fits in ((0, True), (-1, False)):
            longest = str(len(HELD) + spare)
            for end in (b"\n", b""):
                done = run(HELD + end, "--max-line", longest)
                reply = json.loads(done.stdout)
                self.assertEqual("answer" in reply, fits, (spare, end, reply))
        done = run(HELD + b"   \n" + HELD, "--max-line", str(len(HELD)))
        first, second = map(json.loads, done.stdout.splitlines())
        self.assertEqual(first["refused"]["code"], "too_large")
        self.assertIn("--max-line", first["refused"]["hint"])
        self.assertEqual(first["id"], "after")
        self.assertIn("answer", second)

    def test_lines_arrive_in_pieces(self):
        import subprocess
        import time

        from wire import ENGINE

        process = subprocess.Popen([ENGINE], stdin=subprocess.PIPE, stdout=subprocess.PIPE, bufsize=0)
        for piece in (b"\xef", b"\xbb", b"\xbf", b'{"id":"', b"\xc3", b'\xa9","ask"', b':"held"', b"}", b"\r", b"\n"):
            process.stdin.write(piece)
            time.sleep(0.005)
        out, _ = process.communicate(timeout=PATIENCE)
        self.assertEqual(json.loads(out)["id"], "é")


if __name__ == "__main__":
    unittest.main()
