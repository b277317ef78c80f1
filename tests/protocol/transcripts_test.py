# tests/protocol/transcripts_test.py -- sessions as they are on the wire, byte for byte.
#
# A transcript is one session of one server: "# comment", "> request", "< reply", empty lines between. The
# program's version is written {version}. After a deliberate change of wording or numbers:
#
#   COUNTSEL_ENGINE=build/release/countsel python3 transcripts_test.py --update
#
# rewrites the replies; read the difference before committing it.
import difflib
import subprocess
import sys
import unittest
from pathlib import Path

from wire import ENGINE, PATIENCE, run

TRANSCRIPTS = Path(__file__).resolve().parent / "transcripts"


def version():
    done = subprocess.run([ENGINE, "--version"], capture_output=True, check=True, text=True, timeout=PATIENCE)
    return done.stdout.split()[-1]


def without_version(line):
    for around in ('"countsel":"%s"', '"version":"%s"', "Countsel %s "):
        line = line.replace(around % version(), around % "{version}")
    return line


def played(text):
    """The transcript with the replies that the server gives now. Each request has one reply."""
    lines = text.splitlines()
    requests = [line[2:] for line in lines if line.startswith("> ")]
    done = run("".join(request + "\n" for request in requests).encode())
    if done.returncode or done.stderr:
        raise AssertionError(f"exit status {done.returncode}: {done.stderr.decode()}")
    replies = done.stdout.decode().splitlines()
    if len(replies) != len(requests):
        raise AssertionError(f"{len(requests)} requests, {len(replies)} replies")
    answered = iter(replies)
    out = []
    for line in lines:
        if line.startswith("< "):
            continue
        out.append(line)
        if line.startswith("> "):
            out.append("< " + without_version(next(answered)))
    return "\n".join(out) + "\n"


class Transcripts(unittest.TestCase):
    def test_there_are_some(self):
        self.assertGreaterEqual(len(list(TRANSCRIPTS.glob("*.txt"))), 5)

    def test_every_line_is_a_comment_a_request_a_reply_or_empty(self):
        for path in TRANSCRIPTS.glob("*.txt"):
            for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), 1):
                self.assertRegex(line, r"^($|# |> |< )", f"{path.name}:{number}")

    def test_the_server_says_what_is_written(self):
        for path in sorted(TRANSCRIPTS.glob("*.txt")):
            with self.subTest(path.name):
                written = path.read_text(encoding="utf-8")
                now = played(written)
                changed = difflib.unified_diff(
                    written.splitlines(), now.splitlines(), "written", "now", lineterm="", n=1
                )
                self.assertEqual(written, now, "\n".join(line[:600] for line in changed))


if __name__ == "__main__":
    if "--update" in sys.argv:
        for path in sorted(TRANSCRIPTS.glob("*.txt")):
            path.write_text(played(path.read_text(encoding="utf-8")), encoding="utf-8")
    else:
        unittest.main()
