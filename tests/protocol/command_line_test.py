# tests/protocol/command_line_test.py -- what can be typed, what is printed, and with which exit status.
import json
import os
import subprocess
import tempfile
import unittest
from pathlib import Path

from wire import ENGINE, PATIENCE

ANSWERED, REFUSED, MISUSE, UNWRITTEN = 0, 1, 2, 3
CSV = "material,bursts,km_years\niron,3,12.5\npvc,0,9\niron,5,20\n"
ROLES = "count=bursts,exposure=km_years,group=material"


class CommandLine(unittest.TestCase):
    maxDiff = None

    @classmethod
    def setUpClass(cls):
        cls.around = tempfile.TemporaryDirectory()
        cls.table = str(Path(cls.around.name) / "mains.csv")
        Path(cls.table).write_text(CSV, encoding="utf-8")

    @classmethod
    def tearDownClass(cls):
        cls.around.cleanup()

    def run_it(self, *arguments, data="", status=ANSWERED):
        if isinstance(data, str):
            data = data.encode()
        done = subprocess.run([ENGINE, *arguments], input=data, capture_output=True, timeout=PATIENCE)
        done.out, done.errors = done.stdout.decode(), done.stderr.decode()
        self.assertEqual(done.returncode, status, (arguments, done.out[:500], done.errors[:500]))
        return done

    def said(self, *arguments, data=""):
        done = self.run_it(*arguments, data=data)
        self.assertEqual(done.errors, "")
        return done.out

    def refused(self, *arguments, data=""):
        done = self.run_it(*arguments, data=data, status=REFUSED)
        self.assertEqual(done.out, "")
        self.assertTrue(done.errors.startswith("Refused: "), done.errors)
        return done.errors

    def misused(self, *arguments, data=""):
        done = self.run_it(*arguments, data=data, status=MISUSE)
        self.assertEqual(done.out, "")
        self.assertTrue(done.errors)
        return done.errors

    # Serving

    def test_without_a_command_it_serves(self):
        self.assertEqual(json.loads(self.said(data='{"ask":"held"}\n'))["ask"], "held")
        self.assertEqual(self.said(data=""), "")

    def test_settings_of_the_server(self):
        hello = json.loads(self.said("--workers", "3", "--max-line", "5000", data='{"ask":"hello"}'))["answer"][
            "figures"
        ]
        self.assertEqual((hello["workers"], hello["longest_line"]), (3, 5000))
        for wrong in (
            ["--workers", "0"],
            ["--workers", "-1"],
            ["--workers", "x"],
            ["--max-line", "x"],
            ["--max-line", "0"],
            ["--max-line", "-5"],
            ["--files"],
        ):
            with self.subTest(wrong):
                self.misused(*wrong)

    # Help

    def test_version_and_help(self):
        self.assertRegex(self.said("--version"), r"^countsel \d+\.\d+\.\d+\n$")
        text = self.said("--help")
        for part in ("ask", "quick", "questions", "--files", "--workers", "--max-line", "--log", "Exit status"):
            self.assertIn(part, text)
        self.assertIn("how_often", self.said("ask", "--help"))
        self.assertIn("LINE", self.said("quick", "--help"))

    def test_questions_lists_and_explains(self):
        text = self.said("questions")
        for name in ("how_often", "which_higher", "what_drives", "hello", "goodbye"):
            self.assertIn(name, text)
        text = self.said("questions", "which_higher")
        for part in (
            "Roles",
            "count*",
            "Options",
            "confidence",
            "default 0.95",
            "Figures",
            "ratio_low",
            "Table groups",
            "Methods",
            "Wilks",
        ):
            self.assertIn(part, text)
        self.assertIn("Did you mean how_often?", self.refused_name("how_oftn"))
        self.assertEqual(json.loads(self.said("questions", "--json"))["ask"], "questions")
        one = json.loads(self.said("questions", "how_often", "--json"))["answer"]["questions"]
        self.assertEqual([question["name"] for question in one], ["how_often"])

    def refused_name(self, name):
        done = self.run_it("questions", name, status=REFUSED)
        self.assertEqual(done.out, "")
        return done.errors

    def test_help_fits_a_terminal(self):
        for arguments in (
            ["--help"],
            ["ask", "--help"],
            ["questions"],
            ["questions", "how_often"],
            ["questions", "what_drives"],
        ):
            for line in self.said(*arguments).splitlines():
                if not line.lstrip().startswith("{"):  # an example request is one line, to be copied
                    self.assertLessEqual(len(line), 120, line)

    # Asking

    def test_ask_a_table(self):
        text = self.said(
            "ask", "how_often", "per=100", "--roles", ROLES, "--words", "events=bursts,exposure=km-years", self.table
        )
        self.assertIn("8 bursts in 41.5 km-years: 19 bursts per 100 km-years", text)
        self.assertIn("label", text)
        self.assertRegex(text, r"(?m)^iron +8 +32\.5 +25 \(11 to 49\)")
        self.assertRegex(text, r"(?m)^pvc +0 +9 ")
        self.assertIn("- A calculation aid", " ".join(text.split()).replace("  ", " "))

    def test_json_is_the_wires_reply(self):
        ours = json.loads(self.said("ask", "how_often", "per=100", "--roles", ROLES, "--json", self.table))
        columns = {"material": ["iron", "pvc", "iron"], "bursts": [3, 0, 5], "km_years": [12.5, 9, 20]}
        roles = dict(pair.split("=") for pair in ROLES.split(","))
        request = {"ask": "how_often", "of": {"columns": columns, "roles": roles}, "with": {"per": 100}}
        wire = json.loads(self.said(data=json.dumps(request)))
        self.assertEqual(ours, wire)

    def test_a_refusal_in_json(self):
        done = self.run_it("ask", "how_often", "confidence=2", "--roles", ROLES, "--json", self.table, status=REFUSED)
        self.assertEqual(json.loads(done.out)["refused"]["code"], "bad_value")
        self.assertEqual(done.errors, "")

    def test_tables_on_standard_input(self):
        wanted = self.said("ask", "how_often", "--roles", ROLES, self.table)
        self.assertEqual(self.said("ask", "how_often", "--roles", ROLES, "-", data=CSV), wanted)
        for text in (
            CSV.replace(",", "\t"),
            CSV.replace(",", "\t").replace("\n", "\r\n"),
            CSV.replace(",", ";"),
            "\ufeff" + CSV,
        ):
            self.assertEqual(self.said("ask", "how_often", "--roles", ROLES, "-", data=text), wanted)

    def test_pasted_cells_with_a_decimal_comma(self):
        text = "count\texposure\n3\t12,5\n1\t1.200,5\n"
        self.assertIn("decimal comma", self.refused("ask", "how_often", "-", data=text))
        self.assertIn("1,213", self.said("ask", "how_often", "decimal=,", "-", data=text))

    def test_without_a_header(self):
        text = CSV.split("\n", 1)[1]
        roles = "label=1,count=2,exposure=3"
        self.assertIn(
            "8 events in 41.5", self.said("ask", "how_often", "--no-header", "--roles", roles, "-", data=text)
        )

    def test_only(self):
        text = self.said("ask", "how_often", "--roles", ROLES, "--only", "material=iron", self.table)
        self.assertIn("8 events in 32.5", text)
        text = self.said(
            "ask", "how_often", "--roles", ROLES, "--only", "material=iron", "--only", "material=pvc", self.table
        )
        self.assertIn("8 events in 41.5", text)
        text = self.said(
            "ask", "how_often", "--roles", ROLES, "--only", "bursts=3", "--only", "material=iron", self.table
        )
        self.assertIn("3 events in 12.5", text)

    def test_options_of_every_type(self):
        self.said("ask", "how_often", "limits=mid-p", "confidence=0.9", "side=upper", "--roles", ROLES, self.table)
        self.said("ask", "how_often", "limits=bayes", 'prior={"shape":1,"rate":0}', "--roles", ROLES, self.table)
        self.said("ask", "which_higher", "reference=pvc", "margin=1.5", "--roles", ROLES, self.table)
        self.said("ask", "which_higher", "margin=0.8,1.25", "--roles", ROLES, self.table)
        self.said("ask", "which_higher", "margin=[0.8,1.25]", "--roles", ROLES, self.table)
        data = "count,exposure,material,age\n" + "".join(
            f"{i % 5},{9 + i},{'ab'[i % 2]},{i * i % 17}\n" for i in range(30)
        )
        text = self.said(
            "ask", "what_drives", "terms=material,age", "reference=material=b", "covariance=true", "-", data=data
        )
        self.assertIn("baseline", text)
        self.assertEqual(
            text,
            self.said(
                "ask",
                "what_drives",
                'terms=["material","age"]',
                'reference={"material":"b"}',
                "covariance=true",
                "-",
                data=data,
            ),
        )
        self.said("ask", "what_drives", 'terms=[{"log":"age","plus":1}]', "-", data=data)

    def test_a_reference_that_looks_like_a_number(self):
        data = "count,exposure,group\n3,10,2023\n5,10,2024\n"
        self.assertIn("compared with 2023", self.said("ask", "which_higher", "reference=2023", "-", data=data))

    def test_what_is_refused(self):
        self.assertIn("confidence", self.refused("ask", "how_often", "confidence=x", "--roles", ROLES, self.table))
        self.assertIn(
            'Did you mean "confidence"?',
            self.refused("ask", "how_often", "confidnce=0.9", "--roles", ROLES, self.table),
        )
        self.assertIn('Did you mean "how_often"?', self.refused("ask", "how_oftn", self.table))
        self.assertIn("count", self.refused("ask", "how_often"))
        self.assertIn('"burst"', self.refused("ask", "how_often", "--roles", "count=burst", self.table))
        self.assertIn("cells", self.refused("ask", "how_often", "-", data="count,exposure\n1,2\n3\n"))
        self.assertIn("quote", self.refused("ask", "how_often", "-", data='count\n"1\n'))
        self.assertIn("UTF-8", self.refused("ask", "how_often", "-", data=b"count\n\xff\n"))
        self.refused("ask", "how_often", "-", data="")

    def test_misuse(self):
        for arguments in (
            ["nonsense"], ["--nonsense"], ["ask"], ["quick"], ["ask", "how_often", "--nonsense"], ["quick", "7", "8"],
            ["ask", "how_often", str(Path(self.table).parent / "none.csv")], ["ask", "how_often", self.around.name],
            ["ask", "how_often", self.table, self.table], ["ask", "how_often", "--roles", "count", self.table],
            ["ask", "how_often", "--roles", "=x", self.table], ["ask", "how_often", "--only", "x", self.table],
            ["ask", "how_often", "--words", "x", self.table], ["ask", "how_often", "=5", self.table], ["quick", "7", "ask"],
        ):  # fmt: skip
            with self.subTest(arguments):
                self.misused(*arguments)
        self.misused("quick", b"\xff\xfe")

    def test_quick(self):
        text = self.said("quick", "14 in 2300 vs 5 in 2100")
        self.assertIn("2.6 times", text)
        self.assertIn("Read as: 14 in 2,300 vs 5 in 2,100, per 1,000, at 95%", text)
        self.assertEqual(json.loads(self.said("quick", "7 in 1200", "--json"))["answer"]["read_as"]["ask"], "how_often")
        self.assertIn("Say it like", self.refused("quick", "7 in"))

    # Where it prints to

    def test_a_full_disk_is_a_failure(self):
        for arguments in (["questions"], ["quick", "7 in 1200"], ["quick", "7", "--json"], ["--help"], ["--version"]):
            with self.subTest(arguments), open("/dev/full", "wb") as full:
                done = subprocess.run([ENGINE, *arguments], stdout=full, stderr=subprocess.PIPE, timeout=PATIENCE)
                self.assertEqual(done.returncode, UNWRITTEN)
                self.assertIn(b"cannot write", done.stderr)

    def test_a_closed_pipe_is_none(self):
        reading, writing = os.pipe()
        os.close(reading)
        done = subprocess.run([ENGINE, "questions"], stdout=writing, stderr=subprocess.PIPE, timeout=PATIENCE)
        os.close(writing)
        self.assertEqual((done.returncode, done.stderr), (ANSWERED, b""))

    def test_a_closed_input_holds_no_table(self):
        done = subprocess.run(["sh", "-c", f'"{ENGINE}" ask how_often - <&-'], capture_output=True, timeout=PATIENCE)
        self.assertEqual(done.returncode, REFUSED)

    def test_a_long_table_is_cut_for_people_not_for_programs(self):
        data = "count\n" + "1\n" * 100
        self.assertIn("… and 40 more rows", self.said("ask", "how_often", "-", data=data))
        self.assertEqual(
            len(
                json.loads(self.said("ask", "how_often", "--json", "-", data=data))["answer"]["tables"]["rates"][
                    "count"
                ]
            ),
            100,
        )


if __name__ == "__main__":
    unittest.main()
