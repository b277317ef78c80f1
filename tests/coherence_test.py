# tests/coherence_test.py -- does the tree keep its own rules?
#
# Read off the tracked files: the floors stay apart, each source says what it is, none grows beyond what
# one sitting can read, and nothing of the machine it was written on is left in it.
import functools
import os
import re
import subprocess
import unittest
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
CPP = (".cpp", ".hpp")
SOURCES = (*CPP, ".py", ".js", ".sh")
MOST_LINES = 400

# Written in pieces, so that this file does not find itself.
MARKS = re.compile(
    r"\b(" + "|".join(["TO" "DO", "FIX" "ME", "X" "XX", "HA" "CK", "T" "BD", "ST" "UB", "st" "ub"]) + r")\b"
    + "|" + "not " "implemented" + "|" + "place" "holder" + "|" + "lorem " "ipsum"
)  # fmt: skip
HOMES = re.compile(r"(?<![\w.$}*])/(?:home|Users|root|work)/\w")
# What the engine may not see: text formats, streams, threads, clocks. A lock is allowed: pieces of a pass
# run on whoever's hands the caller gave.
FORBIDDEN = re.compile(
    r"nlohmann|json|csv\.h|CLI|iostream|fstream|ostream|istream|cstdio|stdio\.h|print"
    r"|thread|future|condition_variable|chrono|ctime|time\.h|unistd\.h|sys/"
)
INCLUDE = re.compile(r'^\s*#\s*include\s*[<"]([^>"]+)[>"]', re.MULTILINE)
TOP = {"engine", "protocol", "adapters", "tests", "samples"}
TOP_FILES = {"CMakeLists.txt", "CMakePresets.json", "README.md", "DEVELOPERS.md", "LICENSE", "CHANGELOG.md"}


@functools.cache
def tracked():
    """The repository's files as paths relative to its top; without git, all but what a build leaves."""
    git = ["git", "-c", "safe.directory=*", "-C", str(ROOT), "ls-files", "-z"]
    try:
        listed = subprocess.run(git, capture_output=True, check=True, text=True).stdout
        names = [name for name in listed.split("\0") if name]
    except (OSError, subprocess.CalledProcessError):
        found = (str(path.relative_to(ROOT)) for path in ROOT.rglob("*") if path.is_file())
        names = [name for name in found if not re.match(r"build/|\.git/|.*__pycache__/", name)]
    return sorted(name for name in names if (ROOT / name).is_file())


@functools.cache
def text(name):
    """A tracked file's text, "" for what is not text."""
    try:
        return (ROOT / name).read_text(encoding="utf-8")
    except UnicodeDecodeError:
        return ""


def sources(*folders, kinds=SOURCES):
    return [name for name in tracked() if name.endswith(kinds) and name.startswith(folders or "")]


def lines_matching(pattern, names):
    return [
        f"{name}:{number}: {line.strip()[:90]}"
        for name in names
        for number, line in enumerate(text(name).splitlines(), 1)
        if pattern.search(line)
    ]


class Coherence(unittest.TestCase):
    maxDiff = None

    def test_there_is_something_to_read(self):
        self.assertGreater(len(sources("engine/", kinds=CPP)), 3)

    def test_a_source_opens_with_its_own_path(self):
        wrong = [
            name
            for name in sources("engine/", "protocol/", kinds=CPP)
            if not re.match(rf"// {re.escape(name)} -- \S", text(name))
        ]
        self.assertEqual(wrong, [])

    def test_no_source_is_longer_than_a_sitting(self):
        long = {name: count for name in sources() if (count := text(name).count("\n")) > MOST_LINES}
        self.assertEqual(long, {})

    def test_the_engine_sees_no_wire_no_stream_no_thread_and_no_clock(self):
        seen = [
            (name, included)
            for name in sources("engine/", kinds=CPP)
            for included in INCLUDE.findall(text(name))
            if FORBIDDEN.search(included) and not included.startswith("engine/")
        ]
        self.assertEqual(seen, [])

    def test_a_floor_includes_only_what_is_below_it(self):
        below = {"engine/": ("engine/",), "protocol/": ("engine/", "protocol/")}
        above = [
            (name, included)
            for floor, allowed in below.items()
            for name in sources(floor, kinds=CPP)
            for included in INCLUDE.findall(text(name))
            if included.split("/")[0] in TOP and not included.startswith(allowed)
        ]
        self.assertEqual(above, [])

    def test_boost_has_one_door(self):
        doors = {
            name
            for name in sources("engine/", "protocol/", kinds=CPP)
            if any(included.startswith("boost/") for included in INCLUDE.findall(text(name)))
        }
        self.assertEqual({str(Path(name).with_suffix("")) for name in doors}, {"engine/numbers/distributions"})

    def test_a_header_is_guarded(self):
        bare = [name for name in sources(kinds=(".hpp",)) if "#pragma once" not in text(name)]
        self.assertEqual(bare, [])

    def test_nothing_of_this_machine_is_left(self):
        self.assertEqual(lines_matching(HOMES, tracked()), [])
        for folder in {ROOT, ROOT.parent, Path.home()}:
            if len(folder.parts) > 2:  # a single /name is an ordinary word too
                own = re.compile(r"(?<![\w.])" + re.escape(str(folder)) + r"(?![\w-])")
                self.assertEqual(lines_matching(own, tracked()), [])

    def test_no_marks_of_unfinished_work(self):
        self.assertEqual(lines_matching(MARKS, sources()), [])

    def test_the_top_level_is_as_agreed(self):
        tops = {name.split("/")[0] for name in tracked()}
        self.assertEqual({top for top in tops if not top.startswith(".")} - TOP - TOP_FILES, set())

    def test_scripts_parse_and_can_be_run(self):
        scripts = [name for name in tracked() if name.endswith(".sh") or text(name).startswith("#!")]
        self.assertTrue(scripts)
        for name in scripts:
            with self.subTest(name):
                self.assertTrue(os.access(ROOT / name, os.X_OK), "not executable")
                first = text(name).splitlines()[0]
                self.assertTrue(first.startswith("#!"), "no first line that names its interpreter")
                if "python" in first:
                    compile(text(name), name, "exec")
                else:
                    shell = "bash" if "bash" in first else "sh"
                    subprocess.run([shell, "-n", ROOT / name], check=True)


if __name__ == "__main__":
    unittest.main()
