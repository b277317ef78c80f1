"""The README's question table and first reply are what the engine says.

`python3 tests/readme_test.py --update` writes them anew.
"""

import json
import os
import re
import subprocess
import sys
import unittest
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
README = ROOT / "README.md"
ENGINE = os.environ.get("COUNTSEL_ENGINE", str(ROOT / "build/release/countsel"))


def ask(request):
    """One request, one reply, as text."""
    done = subprocess.run([ENGINE], input=request + "\n", capture_output=True, text=True, check=True)
    return done.stdout.rstrip("\n")


def table():
    reply = json.loads(ask('{"ask":"questions"}'))
    lines = ["| question | what it answers | roles (* required) |", "|---|---|---|"]
    for question in reply["answer"]["questions"]:
        roles = ", ".join(role["name"] + ("*" if role["required"] else "") for role in question["roles"])
        lines.append(f"| `{question['name']}` | {question['asks']} | {roles} |")
    return "\n".join(lines)


def renewed(text):
    """The README with its generated parts made anew."""
    text = re.sub(
        r"(<!-- question table: .*? -->\n).*?(<!-- question table end -->)",
        lambda match: match[1] + table() + "\n" + match[2],
        text,
        flags=re.S,
    )
    request = re.search(r"<!-- example request -->\n```json\n(.*?)\n```", text, re.S)[1]
    return re.sub(
        r"(<!-- example reply -->\n```json\n).*?(```\n<!-- example end -->)",
        lambda match: match[1] + ask(request) + "\n" + match[2],
        text,
        flags=re.S,
    )


class Readme(unittest.TestCase):
    maxDiff = None

    def test_generated_parts_are_what_the_engine_says(self):
        text = README.read_text(encoding="utf-8")
        self.assertEqual(text, renewed(text))


if __name__ == "__main__":
    if "--update" in sys.argv:
        README.write_text(renewed(README.read_text(encoding="utf-8")), encoding="utf-8")
    else:
        unittest.main()
