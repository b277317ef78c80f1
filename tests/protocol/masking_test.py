# tests/protocol/masking_test.py -- attacks what is shown with "mask_below": can a withheld count be found?
#
# The attacker knows the question, the exposures, the threshold and even which of the withheld counts are small.
# Every list of counts that fits is asked of the engine without masking; those whose answers agree with all that
# was shown remain. The attack succeeds, and the test fails, where all that remain agree on a withheld count.
import itertools
import json
import random
import subprocess
import unittest

from wire import ENGINE

K = 4  # small, so that all candidates can be tried


def ask_all(requests):
    lines = "".join(json.dumps(request) + "\n" for request in requests)
    done = subprocess.run([ENGINE], input=lines, capture_output=True, text=True, timeout=600, check=True)
    return [json.loads(line) for line in done.stdout.splitlines()]


def questions():
    return {question["name"] for question in ask_all([{"ask": "questions"}])[0]["answer"]["questions"]}


def shown_numbers(answer):
    """Everything that is shown, as (path, value); what is withheld is left out."""
    for name, value in answer["figures"].items():
        if value is not None and not (isinstance(value, str) and value.startswith("<")):
            yield ("figure", name), value
    for table, columns in answer["tables"].items():
        for column, cells in columns.items():
            for row, value in enumerate(cells):
                if value is not None and not (isinstance(value, str) and value.startswith("<")):
                    yield (table, column, row), value
    picture = answer.get("picture")
    if picture:
        yield ("title",), picture["title"]
        for series in picture["series"]:
            for part in ("y", "low", "high"):
                for point, value in enumerate(series.get(part, [])):
                    if value is not None:
                        yield (series["name"], part, point), value
        for line in picture["lines"]:
            if line["y"] is not None:
                yield ("line", line["name"]), line["y"]


def agrees(masked, candidate):
    """Whether the candidate's full answer shows all that the masked one shows."""
    full = dict(shown_numbers(candidate))
    if any(full.get(path) != value for path, value in shown_numbers(masked)):
        return False
    said = masked["say"].split(" To protect counts")[0]
    if not said.startswith("What was asked rests on") and any(
        part not in candidate["say"] for part in said.split(". ")
    ):
        return False
    texts = {note["text"] for note in candidate["notes"]}
    return all(note["text"] in texts for note in masked["notes"] if note["code"] != "masked")


class Attack(unittest.TestCase):
    """`cells` says which rows of the data make up each count that is shown."""

    def attack(self, request, cells, room=3):
        counts = request["of"]["count"]
        masked_request = dict(request, **{"with": dict(request.get("with", {}), mask_below=K)})
        reply = ask_all([masked_request])[0]
        self.assertIn("answer", reply, reply)
        masked = reply["answer"]
        sums = [sum(counts[row] for row in rows) for rows in cells]
        shown = self.counts_of(masked)
        self.assertEqual(len(shown), len(cells))
        hidden = []
        for cell, value in enumerate(shown):
            if isinstance(value, str):
                self.assertEqual(value, f"<{K}")
                hidden.append(cell)
            else:
                self.assertEqual(value, sums[cell])
                self.assertGreaterEqual(value, K, "a small count is shown")
        self.assertEqual(bool(hidden), any(value < K for value in sums))
        if not hidden:
            return masked
        ranges = [
            range(0, K) if sums[cell] < K else range(max(K, sums[cell] - room), sums[cell] + room + 1)
            for cell in hidden
        ]
        candidates = []
        for values in itertools.product(*ranges):
            trial = list(counts)
            for cell, value in zip(hidden, values):
                for row in cells[cell]:
                    trial[row] = 0
                trial[cells[cell][0]] = value
                if sums[cell] == value:
                    for row in cells[cell]:
                        trial[row] = counts[row]
            candidates.append((values, trial))
        self.assertLess(len(candidates), 20000)
        replies = ask_all([dict(request, of=dict(request["of"], count=trial)) for _, trial in candidates])
        left = [
            values for (values, _), one in zip(candidates, replies) if "answer" in one and agrees(masked, one["answer"])
        ]
        self.assertIn(tuple(sums[cell] for cell in hidden), left, "the truth itself must agree")
        for place, cell in enumerate(hidden):
            self.assertGreater(len({values[place] for values in left}), 1, f"count {cell} of {sums} is found: {masked}")
        return masked

    @staticmethod
    def counts_of(answer):
        counts = []
        for columns in answer["tables"].values():
            for column in ("count", "reference_count"):
                counts += columns.get(column, [])
        return counts


class RowsOneByOne(Attack):
    LISTS = [
        [3, 20, 40],
        [3, 40],
        [0, 5],
        [0, 0, 9],
        [1, 1, 30],
        [3, 3, 17],
        [0, 0, 0],
        [2],
        [7, 8, 9],
        [0, 1, 2, 3],
        [0, 0, 4],
        [3, 3, 4],
        [3, 4, 4],
        [0, 12, 12, 30],
    ]

    def test_how_often(self):
        for counts in self.LISTS:
            with self.subTest(counts=counts):
                self.attack(
                    {
                        "ask": "how_often",
                        "of": {"count": counts, "exposure": [11.0 + 3 * i for i in range(len(counts))]},
                    },
                    [[i] for i in range(len(counts))],
                )

    def test_how_often_scaled(self):
        self.attack(
            {
                "ask": "how_often",
                "of": {"count": [3, 1, 20, 40], "exposure": [5, 6, 12, 9]},
                "with": {"spread": "scaled"},
            },
            [[0], [1], [2], [3]],
        )

    def test_on_target(self):
        for counts in self.LISTS:
            with self.subTest(counts=counts):
                self.attack(
                    {
                        "ask": "on_target",
                        "of": {"count": counts, "expected": [4.0 + i for i in range(len(counts))]},
                        "with": {"adjust": "bh"},
                    },
                    [[i] for i in range(len(counts))],
                )

    def test_who_stands_out(self):
        for spread in ("poisson", "added", "scaled"):
            for counts in ([3, 20, 40, 9], [1, 2, 30, 12, 9], [3, 9, 9, 60, 14]):
                with self.subTest(counts=counts, spread=spread):
                    masked = self.attack(
                        {
                            "ask": "who_stands_out",
                            "of": {
                                "count": counts,
                                "exposure": [9, 11, 14, 10, 12][: len(counts)],
                                "label": ["a", "b", "c", "d", "e"][: len(counts)],
                            },
                            "with": {"spread": spread, "draws": 50},
                        },
                        [[i] for i in range(len(counts))],
                        room=2,
                    )
                    if spread == "poisson":  # the total is shown, so the benchmark and other units' tests are
                        self.assertIsNotNone(masked["figures"]["benchmark"])
                        self.assertIsNotNone(masked["tables"]["units"]["p_value"][3 if len(counts) == 5 else 2])

    def test_random_lists(self):
        chance = random.Random(7)
        for _ in range(12):
            counts = [chance.choice([0, 1, 2, 3, 4, 5, 8, 15]) for _ in range(chance.randint(2, 5))]
            if sum(value < K for value in counts) > 4:
                continue
            with self.subTest(counts=counts):
                self.attack(
                    {"ask": "how_often", "of": {"count": counts, "exposure": [7 + i for i in range(len(counts))]}},
                    [[i] for i in range(len(counts))],
                    room=2,
                )


class Groups(Attack):
    def test_how_often(self):
        self.attack(
            {
                "ask": "how_often",
                "of": {"count": [2, 1, 30, 25, 9], "exposure": [5, 6, 12, 9, 4], "group": ["a", "a", "b", "b", "c"]},
            },
            [[0, 1], [2, 3], [4]],
        )
        self.attack(
            {
                "ask": "how_often",
                "of": {"count": [1, 1, 30, 25, 9], "exposure": [5, 6, 12, 9, 4], "group": ["a", "a", "b", "b", "c"]},
            },
            [[0, 1], [2, 3], [4]],
        )

    def test_which_higher(self):
        for counts in ([3, 20], [0, 9], [2, 3], [0, 0], [12, 30]):
            for options in ({}, {"limits": "score", "test": "score"}, {"test": "e-test"}):
                with self.subTest(counts=counts, options=options):
                    masked = self.attack(
                        {
                            "ask": "which_higher",
                            "of": {"count": counts, "exposure": [12, 17], "group": ["a", "b"]},
                            "with": options,
                        },
                        [[0], [1]],
                    )
                    if min(counts) < K:
                        self.assertIsNone(masked["figures"]["ratio"])
                        self.assertIsNone(masked["figures"]["p_value"])

    def test_do_they_differ(self):
        if "do_they_differ" not in questions():
            self.skipTest("not there")
        for counts in ([3, 20, 31], [1, 2, 30]):
            self.attack(
                {"ask": "do_they_differ", "of": {"count": counts, "exposure": [12, 17, 20], "group": ["a", "b", "c"]}},
                [[0], [1], [2]],
            )

    def test_same_mix(self):
        if "same_mix" not in questions():
            self.skipTest("not there")
        self.attack(
            {
                "ask": "same_mix",
                "of": {
                    "count": [1, 2, 20, 31, 9, 14],
                    "exposure": [12, 17, 20, 30, 15, 22],
                    "group": ["a", "a", "b", "b", "c", "c"],
                    "stratum": ["x", "y"] * 3,
                },
            },
            [[0, 1], [2, 3], [4, 5]],
            room=2,
        )

    def test_within_strata(self):
        if "within_strata" not in questions():
            self.skipTest("not there")
        self.attack(
            {
                "ask": "within_strata",
                "of": {
                    "count": [2, 20, 31, 9, 14, 11],
                    "exposure": [12, 17, 20, 30, 15, 22],
                    "group": ["a", "a", "a", "b", "b", "b"],
                    "stratum": ["x", "y", "z"] * 2,
                },
            },
            [[0], [1], [2], [3], [4], [5]],
            room=2,
        )

    def test_rate_or_mix(self):
        # No count is shown, yet the parts follow from them: with small ones the parts go, and what is left agrees
        # with other counts.
        of = {"count": [2, 20, 31, 9], "exposure": [12, 17, 20, 30], "group": ["a", "a", "b", "b"],
              "stratum": ["x", "y", "x", "y"]}
        request = {"ask": "rate_or_mix", "of": of}
        masked = ask_all([dict(request, **{"with": {"mask_below": K}})])[0]["answer"]
        self.assertTrue(all(value is None for value in masked["figures"].values()), masked)
        others = [dict(of, count=[small, 22 - small, 31, 9]) for small in range(K)]
        replies = ask_all([dict(request, of=other) for other in others])
        self.assertGreater(sum(agrees(masked, reply["answer"]) for reply in replies), 1)

    def test_does_it_climb(self):
        if "does_it_climb" not in questions():
            self.skipTest("not there")
        self.attack(
            {
                "ask": "does_it_climb",
                "of": {"count": [2, 1, 9, 14, 30], "exposure": [12, 17, 20, 30, 22], "order": [1, 2, 3, 4, 5]},
            },
            [[0], [1], [2], [3], [4]],
            room=2,
        )


class WhatIsLeft(unittest.TestCase):
    REQUEST = {
        "ask": "how_often",
        "of": {"count": [3, 20, 40], "exposure": [11, 14, 17], "label": ["a", "b", "c"]},
        "with": {"mask_below": 5},
        "want": ["say", "figures", "tables", "shown", "picture", "notes", "stamp"],
    }

    def test_marks(self):
        answer = ask_all([self.REQUEST])[0]["answer"]
        rates = answer["tables"]["rates"]
        self.assertEqual(rates["count"], ["<5", "<5", 40])
        self.assertEqual(rates["exposure"], [11, 14, 17])
        for column in ("rate", "low", "high", "every"):
            self.assertEqual([value is None for value in rates[column]], [True, True, False], column)
        self.assertEqual(answer["figures"]["count"], 63)
        self.assertEqual(answer["shown"]["rates"]["count"], ["<5", "<5", "40"])
        self.assertEqual(answer["picture"]["series"][0]["y"][:2], [None, None])
        self.assertIn("<5", answer["say"])
        self.assertIn("masked", [note["code"] for note in answer["notes"]])

    def test_stamp_does_not_tell(self):
        others = [
            dict(self.REQUEST, of=dict(self.REQUEST["of"], count=counts)) for counts in ([3, 20, 40], [2, 21, 40])
        ]
        first, second = ask_all(others)
        self.assertEqual(first, second)

    def test_nothing_small(self):
        request = dict(self.REQUEST, of=dict(self.REQUEST["of"], count=[5, 20, 40]))
        plain = dict(request, **{"with": {}})
        answer, full = (reply["answer"] for reply in ask_all([request, plain]))
        self.assertEqual(answer["tables"], full["tables"])
        self.assertIn("nothing_masked", [note["code"] for note in answer["notes"]])

    def test_frequencies(self):
        request = {
            "ask": "is_it_poisson",
            "of": {"value": [0, 1, 2, 3, 4], "times": [109, 65, 22, 3, 1]},
            "with": {"mask_below": 5},
        }
        answer = ask_all([request])[0]["answer"]
        self.assertEqual(answer["tables"]["frequencies"]["observed"], [109, 65, 22, "<5", "<5"])
        self.assertEqual([value for value in answer["figures"].values() if isinstance(value, float)], [])
        self.assertNotIn("picture", answer)

    def test_every_question_with_counts_has_it(self):
        for question in ask_all([{"ask": "questions"}])[0]["answer"]["questions"]:
            counts = any(column["style"] == "count" for table in question["tables"] for column in table["columns"])
            if counts and not question["service"]:
                self.assertIn("mask_below", [option["name"] for option in question["options"]], question["name"])

    def test_many_units(self):
        chance = random.Random(3)
        counts = [chance.choice([0, 0, 1, 2, 3, 6, 9, 14, 30]) for _ in range(3000)]
        request = {
            "ask": "who_stands_out",
            "of": {
                "count": counts,
                "exposure": [10 + i % 7 for i in range(3000)],
                "label": [f"u{i}" for i in range(3000)],
            },
            "with": {"mask_below": 5},
        }
        units = ask_all([request])[0]["answer"]["tables"]["units"]
        for count, shown, rate, standing in zip(counts, units["count"], units["rate"], units["standing"]):
            if count < 5:
                self.assertEqual((shown, rate, standing), ("<5", None, None))


if __name__ == "__main__":
    unittest.main()
