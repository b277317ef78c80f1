# tests/protocol/long_lines_slow_test.py -- lines of hundreds of megabytes, and little memory to read them in.
import json
import resource
import subprocess
import threading
import unittest

from wire import ENGINE, how_often

MB = 1 << 20
HELD = b'{"ask":"held","id":"after"}\n'


def stream(pieces, *arguments, memory=None):
    """Feeds pieces as they come; the replies and the exit status. `memory`: bytes that the server may have."""
    limit = (lambda: resource.setrlimit(resource.RLIMIT_AS, (memory, memory))) if memory else None
    process = subprocess.Popen([ENGINE, *arguments], stdin=subprocess.PIPE, stdout=subprocess.PIPE, preexec_fn=limit)

    def feed():
        with process.stdin:
            for piece in pieces:
                process.stdin.write(piece)

    feeding = threading.Thread(target=feed)
    feeding.start()
    replies = [json.loads(line) for line in process.stdout]
    feeding.join()
    process.stdout.close()
    return replies, process.wait(60)


def line_of(megabytes, start, filling, end):
    yield start
    piece = filling * (MB // len(filling))
    for _ in range(megabytes):
        yield piece
    yield end + b"\n"


class LongLines(unittest.TestCase):
    def refused_then_answered(self, pieces, code, **rest):
        def all_pieces():
            yield from pieces
            yield HELD

        (refused, answered), status = stream(all_pieces(), **rest)
        self.assertEqual(refused["refused"]["code"], code, refused)
        self.assertEqual(answered["id"], "after")
        self.assertIn("answer", answered)
        self.assertEqual(status, 0)

    def test_300_megabytes_are_too_large_and_the_next_line_is_answered(self):
        start = b'{"id":1,"ask":"how_often","of":{"count":[1'
        self.refused_then_answered(line_of(300, start, b",1", b"]}}"), "too_large")

    def test_300_megabytes_of_one_text(self):
        self.refused_then_answered(line_of(300, b'{"ask":"', b"x", b'"}'), "too_large")

    def test_300_megabytes_of_spaces_and_of_nonsense(self):
        self.refused_then_answered(line_of(300, b" ", b" ", b" "), "too_large")
        self.refused_then_answered(line_of(300, b"x", b"x", b"x"), "bad_json")

    def test_a_long_line_is_read_whole(self):
        start = b'{"id":1,"ask":"how_often","want":["figures"],"of":{"count":[0'
        (reply,), status = stream(line_of(4, start, b",0", b"]}}"))
        self.assertEqual(reply["answer"]["figures"]["exposure"], 2 * MB + 1)
        self.assertEqual(status, 0)

    def test_what_would_take_more_memory_than_there_is_is_refused_before_it_is_tried(self):
        start = b'{"id":1,"ask":"how_often","want":["figures"],"of":{"count":[0'
        self.refused_then_answered(line_of(40, start, b",0", b"]}}"), "out_of_memory", memory=4000 * MB)

    def test_lines_that_would_take_more_memory_than_they_have_bytes_for(self):
        keys = b"".join(b'"%x":1,' % i for i in range(200_000))
        for start, filling, end, code in [
            (b'{"ask":"held","with":{"a":[0', b",[]", b"]}}", "too_large"),
            (b'{"ask":"held","of":{"range":[[1', b",1", b"]]}}", "too_large"),
            (b'{"ask":"how_often","of":{"range":[["count"],[1', b",1", b"]]}}", "length_mismatch"),
            (b'{"ask":"how_often","of":{"count":[1', b",[]", b"]}}", "bad_type"),
            (b'{"ask":"how_often","of":{"only":{"a":[1', b',"b"', b"]}}}", "too_large"),
            (b"{" + keys + b'"a":[1', b",1", b"]}", "too_large"),
        ]:
            with self.subTest(start[:60]):
                self.refused_then_answered(line_of(60, start, filling, end), code)

    def test_little_memory_is_refused_and_survived(self):
        start = b'{"id":1,"ask":"how_often","of":{"count":[1'
        self.refused_then_answered(line_of(120, start, b",1", b"]}}"), "out_of_memory", memory=500 * MB)
        self.refused_then_answered(line_of(150, b'{"id":"', b"x", b'"}'), "out_of_memory", memory=300 * MB)


if __name__ == "__main__":
    unittest.main()
