# tests/protocol/wire.py -- what the tests of the wire share: the real binary, lines in, lines out.
import array
import base64
import json
import os
import subprocess
import unittest
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
ENGINE = os.environ.get("COUNTSEL_ENGINE") or str(ROOT / "build/release/countsel")
PATIENCE = 60  # seconds: a hang should fail, a busy machine should not


def as_line(request):
    """A request as a line of bytes: a dict is written as JSON, text and bytes go as they are."""
    if isinstance(request, dict):
        request = json.dumps(request, ensure_ascii=False)
    if isinstance(request, str):
        request = request.encode()
    return request + b"\n"


def run(data, *arguments):
    """Feeds bytes to a server of its own; the finished process, with stdout as bytes."""
    return subprocess.run([ENGINE, *arguments], input=data, capture_output=True, timeout=PATIENCE)


def exchange(requests, *arguments):
    """Sends all requests to a server of its own; all reply lines, read."""
    done = run(b"".join(as_line(request) for request in requests), *arguments)
    if done.returncode != 0 or done.stderr:
        raise AssertionError(f"exit status {done.returncode}: {done.stderr.decode()[:2000]}")
    return [json.loads(line) for line in done.stdout.splitlines()]


class Server:
    """A running server. Requests are sent and replies read one at a time."""

    def __init__(self, *arguments):
        self.process = subprocess.Popen(
            [ENGINE, *arguments], stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.PIPE, bufsize=0
        )
        self.replies = os.fdopen(os.dup(self.process.stdout.fileno()), "rb")

    def send(self, *requests):
        data = memoryview(b"".join(as_line(request) for request in requests))
        while data:
            data = data[self.process.stdin.write(data) :]

    def reply(self):
        line = self.replies.readline()
        return json.loads(line) if line else None

    def ask(self, request):
        self.send(request)
        return self.reply()

    def close(self):
        """Ends the input; the exit status and what was said on standard error."""
        self.process.stdin.close()
        errors = self.process.stderr.read().decode()
        self.process.stderr.close()
        status = self.process.wait(PATIENCE)
        self.replies.close()
        self.process.stdout.close()
        return status, errors

    def __enter__(self):
        return self

    def __exit__(self, *_):
        if self.process.poll() is None:
            try:
                self.process.stdin.close()
                self.process.wait(PATIENCE)
            except (subprocess.TimeoutExpired, BrokenPipeError):
                self.process.kill()
                self.process.wait()
        for pipe in (self.replies, self.process.stdin, self.process.stdout, self.process.stderr):
            pipe.close()


class WireTest(unittest.TestCase):
    """Tests that ask one server after another; a test that breaks it gets the next one a new one."""

    maxDiff = None
    arguments = ()

    @classmethod
    def setUpClass(cls):
        cls.server = Server(*cls.arguments)

    @classmethod
    def tearDownClass(cls):
        cls.server.__exit__()

    def ask(self, request):
        reply = self.server.ask(request)
        if reply is None:
            self.server.__exit__()
            type(self).server = Server(*self.arguments)
            self.fail(f"the server ended on {str(request)[:300]}")
        return reply

    def answer(self, request):
        reply = self.ask(request)
        self.assertIn("answer", reply, f"refused {str(request)[:300]}: {reply.get('refused')}")
        return reply["answer"]

    def refused(self, request, code, column=None, row=None, cell=None, text=None, hint=None):
        """The refusal, checked: its code, its first place, parts of its text and hint."""
        reply = self.ask(request)
        self.assertIn("refused", reply, f"answered {str(request)[:300]}: {str(reply)[:300]}")
        refusal = reply["refused"]
        self.assertEqual(refusal["code"], code, refusal)
        for key, wanted in (("column", column), ("row", row), ("cell", cell)):
            if wanted is not None:
                self.assertTrue(refusal["where"], refusal)
                self.assertEqual(refusal["where"][0].get(key), wanted, refusal)
        for key, wanted in (("text", text), ("hint", hint)):
            if wanted is not None:
                self.assertIn(wanted, refusal.get(key, ""), refusal)
        self.assertTrue(refusal["text"].endswith((".", "?")), refusal)
        return refusal

    def note(self, answer, code):
        """The only note of that code."""
        found = [note for note in answer["notes"] if note["code"] == code]
        self.assertEqual(len(found), 1, answer["notes"])
        return found[0]

    def no_note(self, answer, code):
        self.assertNotIn(code, [note["code"] for note in answer["notes"]])


def packed(values):
    """A column of numbers as a program packs it: quick to write, quick to read."""
    return {"f64": base64.b64encode(array.array("d", values).tobytes()).decode()}


def how_often(of, **rest):
    return {"ask": "how_often", "of": of, **rest}
