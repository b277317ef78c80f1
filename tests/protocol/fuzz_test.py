# tests/protocol/fuzz_test.py -- lines bent at random: one reply for each, and the server lives.
#
# The seed is fixed, so that a failure can be repeated; COUNTSEL_FUZZ_SEED and COUNTSEL_FUZZ_LINES try others.
import base64
import json
import os
import random
import struct
import subprocess
import unittest

from wire import ENGINE, Server, as_line

SEED = int(os.environ.get("COUNTSEL_FUZZ_SEED", "1"))
LINES = int(os.environ.get("COUNTSEL_FUZZ_LINES", "3000"))
CODES = {
    "bad_json", "not_an_object", "unknown_ask", "unknown_key", "missing", "bad_type", "bad_value", "bad_count", "bad_exposure",
    "length_mismatch", "too_few", "too_large", "too_deep", "error_cell", "no_answer", "not_found", "not_allowed", "cancelled",
    "out_of_time", "out_of_memory", "totals_row",
}  # fmt: skip
VALUES = [
    None, True, False, 0, -1, 1, 2.5, 1e308, -1e308, 5e-324, 2**53, 2**53 + 1, 2**64, -(2**63), "", " ", "a", "1", "1,200", "3,5", "#N/A",
    "é😀", "\u0000", "x" * 300, [], {}, [[]], [None], {"f64": "AAAA"}, {"levels": ["a"], "codes": [0]}, [1, 2, 3], ["a", "b"], "exact", "total",
]  # fmt: skip
BYTES = [
    b"\0",
    b"\xff",
    b"\xc3",
    b'"',
    b"\\",
    b"{",
    b"}",
    b"[",
    b"]",
    b",",
    b":",
    b"e",
    b"-",
    b"9" * 40,
    b"\\ud800",
    b"1e999",
    b"null",
    b" ",
    b"\t",
    b"\xef\xbb\xbf",
]


def seeds():
    """The catalogue's own examples, and some that use every form of data."""
    done = subprocess.run([ENGINE], input=b'{"ask":"questions"}\n', capture_output=True, check=True, timeout=60)
    questions = json.loads(done.stdout)["answer"]["questions"]
    found = [example for question in questions for example in question["examples"] if example["ask"] != "goodbye"]
    f64 = base64.b64encode(struct.pack("<3d", 1, 2, 3)).decode()
    roles = {"count": "c", "exposure": "e", "group": "g"}
    found += [
        {"id": 1, "ask": "how_often", "of": {"range": [["c", "e", "g"], [1, 2, "a"], [3, 4, "b"]], "roles": roles, "origin": "S.B2"}},
        {"ask": "which_higher", "of": {"columns": {"c": {"f64": f64}, "e": [1, 2, 3], "g": {"levels": ["a", "b"], "codes": [0, 1, 0]}}, "roles": roles}},
        {"ask": "what_drives", "of": {"columns": {"count": [1, 2, 3, 0, 2], "x": [1, 2, 3, 4, 5], "z": list("aabbc")}}, "with": {"terms": ["x", "z"]}},
        {"ask": "hold", "of": {"columns": {"count": [1, 2], "zone": ["a", "b"]}}, "with": {"name": "t"}},
        {"ask": "how_often", "of": {"held": "t", "only": {"zone": ["a"]}}, "with": {"limits": "bayes", "prior": {"shape": 1, "rate": 0}}, "want": ["say"]},
        {"ask": "quick", "of": {"line": "12 falls / 3,400 bed-days vs 7 / 3,100 at 90%"}, "within_s": 5, "progress": True},
        {"ask": "cancel", "of": {"id": 1}},
        {"ask": "release", "with": {"name": "t"}},
    ]  # fmt: skip
    return found


def bend(rng, value, others):
    """The value with something in it replaced, dropped or doubled."""
    if isinstance(value, dict) and value and rng.random() < 0.85:
        value = dict(value)
        key = rng.choice(list(value))
        action = rng.random()
        if action < 0.65:
            value[key] = bend(rng, value[key], others)
        elif action < 0.8:
            del value[key]
        elif action < 0.9:
            value[rng.choice(["of", "with", "columns", "range", "roles", "count", "per", "f64", "x", ""])] = rng.choice(
                VALUES
            )
        else:
            value[key] = rng.choice(others).get(key, rng.choice(VALUES))
        return value
    if isinstance(value, list) and value and rng.random() < 0.85:
        value = list(value)
        at = rng.randrange(len(value))
        action = rng.random()
        if action < 0.7:
            value[at] = bend(rng, value[at], others)
        elif action < 0.85:
            del value[at]
        else:
            value.insert(at, rng.choice(VALUES))
        return value
    return rng.choice(VALUES)


def tear(rng, line):
    """The bytes of a line with some replaced, dropped, inserted or cut off."""
    line = bytearray(line)
    for _ in range(rng.choice([1, 1, 2, 5])):
        at = rng.randrange(len(line) + 1)
        action = rng.random()
        if action < 0.4:
            line[at:at] = rng.choice(BYTES)
        elif action < 0.7:
            del line[at : at + rng.choice([1, 1, 3, 20])]
        elif action < 0.85:
            line[at : at + 1] = bytes([rng.randrange(256)])
        else:
            del line[at:]
    return bytes(line).replace(b"\n", b"").replace(b"\r", b"")


def bent_lines():
    rng = random.Random(SEED)
    found = seeds()
    for _ in range(LINES):
        request = rng.choice(found)
        for _ in range(rng.choice([0, 1, 1, 2, 4])):
            request = bend(rng, request, found)
        if isinstance(request, dict) and request.get("ask") == "goodbye":
            continue
        line = as_line(request if isinstance(request, dict) else json.dumps(request))[:-1]
        if rng.random() < 0.4:
            line = tear(rng, line)
        if line.strip() and b"goodbye" not in line:
            yield line


class Fuzz(unittest.TestCase):
    def test_one_reply_for_each_line(self):
        with Server("--workers", "2") as server:
            for number, line in enumerate(bent_lines()):
                server.send(line)
                reply = server.reply()
                while reply is not None and "progress" in reply:
                    reply = server.reply()
                self.assertIsNotNone(reply, f"the server ended on line {number}: {line[:2000]}")
                self.assertEqual(("answer" in reply) + ("refused" in reply), 1, line[:2000])
                if "refused" in reply:
                    self.assertIn(reply["refused"]["code"], CODES, (line[:2000], reply))
                    self.assertLessEqual(len(reply["refused"]["where"]), 20)
            status, errors = server.close()
        self.assertEqual((status, errors), (0, ""))

    def test_many_at_once(self):
        lines = list(bent_lines())[:1000]
        done = subprocess.run([ENGINE], input=b"\n".join(lines) + b"\n", capture_output=True, timeout=120)
        self.assertEqual((done.returncode, done.stderr), (0, b""))
        replies = [json.loads(reply) for reply in done.stdout.splitlines()]
        self.assertEqual(sum("progress" not in reply for reply in replies), len(lines))


if __name__ == "__main__":
    unittest.main()
