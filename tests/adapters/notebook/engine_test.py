# tests/adapters/notebook/engine_test.py -- the package and the real engine together.
import math
import os
import random
import signal
import tempfile
import threading
import time
import unittest
from pathlib import Path

import numpy as np
import pandas as pd
import support  # noqa: F401  finds the package and the engine

import countsel
from countsel.catalogue import arguments_of, call_text

MAINS = pd.DataFrame(
    {
        "material": pd.Categorical(["iron", "pvc", "iron", "pvc", "clay"]),
        "bursts": [3, 0, 5, 1, 2],
        "km_years": [12.5, 9.0, 20.25, 31.0, 8.0],
    }
)
ROLES = {"count": "bursts", "exposure": "km_years"}


class Catalogue(unittest.TestCase):
    catalogue = countsel.shared.engine().catalogue

    def test_every_example_of_every_question_through_its_function(self):
        asked = 0
        for name in countsel.shared.engine().asks():
            for example in self.catalogue[name]["examples"]:
                with self.subTest(example=example):
                    data, keywords = arguments_of(example, self.catalogue[name])
                    answer = (
                        getattr(countsel, name)(data, **keywords) if data else getattr(countsel, name)(**keywords)
                    )
                    wire = countsel.ask(example)
                    self.assertEqual((answer.say, answer.notes), (wire.say, wire.notes))
                    self.assertEqual(answer.stamp, wire.stamp)
                    np.testing.assert_equal(answer.figures, wire.figures)
                    for table, frame in answer.tables.items():
                        pd.testing.assert_frame_equal(frame, wire.tables[table])
                    self.assertIn(answer.say[:10], answer._repr_html_())
                    asked += 1
        self.assertGreaterEqual(asked, 3)

    def test_the_examples_in_the_docstrings_can_be_typed(self):
        for name in countsel.shared.engine().asks():
            for example in self.catalogue[name]["examples"]:
                call = call_text(example, self.catalogue[name])
                self.assertIn(call, getattr(countsel, name).__doc__)
                self.assertIsInstance(eval(f"countsel.{call}"), countsel.Answer)

    def test_every_figure_and_table_of_the_examples_is_in_the_catalogue(self):
        for name in countsel.shared.engine().asks():
            entry = self.catalogue[name]
            if entry["service"]:
                continue
            for example in entry["examples"]:
                answer = countsel.ask(example)
                known = {figure["name"] for figure in entry["figures"]}
                self.assertLessEqual(set(answer.figures), known, name)
                self.assertLessEqual(set(answer.tables), {table["name"] for table in entry["tables"]}, name)


class Data(unittest.TestCase):
    def test_a_frame_in_and_a_frame_out(self):
        answer = countsel.how_often(
            MAINS, **ROLES, group="material", per=100, words={"events": "bursts", "exposure": "km-years"}
        )
        rates = answer.tables["rates"].set_index("label")
        self.assertEqual(list(rates.index), ["iron", "pvc", "clay"])
        self.assertEqual(rates.loc["iron", "count"], 8)
        self.assertAlmostEqual(rates.loc["iron", "rate"], 100 * 8 / 32.75, places=12)
        self.assertIn("km-years", answer.say)
        self.assertIn("km-years", " ".join(answer.heads["rates"].values()))
        self.assertEqual(answer.figures["count"], 11)

    def test_every_container_says_the_same(self):
        plain = {"bursts": [3, 0, 5, 1, 2], "km_years": [12.5, 9.0, 20.25, 31.0, 8.0]}
        wanted = countsel.how_often(plain, **ROLES).figures
        arrays = {name: np.array(values) for name, values in plain.items()}
        for data in (MAINS, arrays, countsel.hold(MAINS)):
            self.assertEqual(countsel.how_often(data, **ROLES).figures, wanted)
        by_values = [
            countsel.how_often(count=MAINS.bursts, exposure=MAINS.km_years),
            countsel.how_often(count=arrays["bursts"], exposure=iter(plain["km_years"])),
            countsel.how_often(MAINS, count="bursts", exposure=arrays["km_years"]),
            countsel.how_often({"count": plain["bursts"], "exposure": plain["km_years"]}),
        ]
        for answer in by_values:
            self.assertEqual(answer.figures, wanted)

    def test_packed_numbers_come_back_as_they_went(self):
        draw = random.Random(20)
        exposures = [draw.random() * 10.0 ** draw.randint(-200, 200) for _ in range(500)] + [
            5e-324,
            1.7e308,
            2.0**53,
            0.1,
        ]
        answer = countsel.how_often(count=[1] * len(exposures), exposure=exposures)
        self.assertEqual(answer.tables["rates"]["exposure"].tolist(), exposures)

    def test_blanks_are_left_out_and_told(self):
        answer = countsel.how_often(count=[3, None, 5], exposure=[1.0, 2.0, math.nan])
        self.assertEqual((answer.figures["count"], len(answer.tables["rates"])), (3, 1))
        self.assertTrue(answer.notes)

    def test_a_limit_without_end_is_infinite(self):
        answer = countsel.how_often(count=0, exposure=5, side="lower")
        self.assertEqual(answer.figures["high"], math.inf)

    def test_a_held_table_and_its_columns(self):
        table = countsel.hold(MAINS, "mains")
        self.assertEqual((table.name, table.rows, table.columns), ("mains", 5, ["material", "bursts", "km_years"]))
        self.assertIn("mains", countsel.held().tables["held"]["name"].tolist())
        countsel.release(table)
        with self.assertRaises(countsel.Refused) as caught:
            countsel.how_often(table, **ROLES)
        self.assertEqual(caught.exception.code, "not_found")

    def test_files_below_the_folder_given(self):
        with tempfile.TemporaryDirectory() as folder:
            Path(folder, "mains.csv").write_text("n,km\n3,12\n0,9\n")
            with countsel.Engine(files=folder) as engine:
                self.assertEqual(engine.how_often("mains.csv", count="n", exposure="km").figures["count"], 3)
                self.assertEqual(engine.hold("mains.csv").rows, 2)
                with self.assertRaises(countsel.Refused) as caught:
                    engine.how_often("../mains.csv", count="n")
                self.assertEqual(caught.exception.code, "not_allowed")

    def test_a_spoken_line(self):
        answer = countsel.quick("14 in 2300 vs 5 in 2100", words={"events": "falls"})
        self.assertEqual(answer.more["read_as"]["ask"], "which_higher")
        self.assertEqual(countsel.ask(answer.more["read_as"]).figures, answer.figures)
        self.assertIsInstance(answer.tables["groups"], pd.DataFrame)

    def test_only_some_rows(self):
        answer = countsel.how_often(MAINS, **ROLES, only={"material": ["pvc"]})
        self.assertEqual(answer.figures["count"], 1)


class Refusals(unittest.TestCase):
    def refused(self, code, *given, **keywords):
        with self.assertRaises(countsel.Refused) as caught:
            countsel.how_often(*given, **keywords)
        self.assertEqual(caught.exception.code, code, str(caught.exception))
        return caught.exception

    def test_the_row_and_the_column_are_named(self):
        refused = self.refused("bad_count", MAINS.assign(bursts=[3, 0, 5, -2, 2]), **ROLES)
        self.assertEqual((refused.column, refused.row), ("bursts", 4))
        self.assertIn("-2", refused.text)
        refused = self.refused("bad_exposure", count=[1, 2], exposure=[1.0, 0.0])
        self.assertEqual((refused.column, refused.row), ("exposure", 2))
        refused = self.refused("bad_count", count=[1, 2**53 + 1], exposure=[1, 1])
        self.assertEqual(refused.row, 2)

    def test_a_slip_of_the_pen_gets_the_nearest(self):
        refused = self.refused("not_found", MAINS, count="burst", exposure="km_years")
        self.assertIn('"bursts"', refused.hint)
        self.assertIn('"mid-p"', self.refused("bad_value", MAINS, **ROLES, limits="midp").hint)
        self.assertIn('"per"', self.refused("unknown_key", MAINS, **ROLES, pre=100).hint)

    def test_other_troubles(self):
        self.refused("missing", MAINS, exposure="km_years")
        self.refused("length_mismatch", count=[1, 2], exposure=[1.0])
        self.refused("length_mismatch", MAINS, count="bursts", exposure=5)
        self.refused("bad_value", MAINS, **ROLES, confidence=1.5)
        self.refused("bad_json", {"bursts": ["\ud800"]}, count="bursts")
        self.assertEqual(self.refused("error_cell", {"n": [1, "#N/A"]}, count="n").row, 2)

    def test_the_engine_answers_on(self):
        self.refused("missing", MAINS, exposure="km_years")
        self.assertEqual(countsel.how_often(count=3).figures["count"], 3)


class Life(unittest.TestCase):
    rows = 30_000

    def setUp(self):
        self.engine = countsel.Engine()
        self.addCleanup(self.engine.close)
        draw = np.random.default_rng(1)
        self.large = pd.DataFrame({"n": draw.poisson(50, self.rows), "km": draw.random(self.rows) + 1})

    def test_killed_in_the_middle_and_started_again_with_its_tables(self):
        table = self.engine.hold(self.large, "large")
        before = self.engine.pid
        wanted = self.engine.how_often(table, count="n", exposure="km", want=["figures"]).figures
        threading.Timer(0.02, os.kill, (before, signal.SIGKILL)).start()
        with self.assertRaises(countsel.EngineDied) as caught:
            for _ in range(100):
                self.engine.how_often(table, count="n", exposure="km", limits="likelihood", want=["say"])
        self.assertEqual((caught.exception.exit_code, caught.exception.question), (-9, "how_often"))
        self.assertEqual(self.engine.how_often(table, count="n", exposure="km", want=["figures"]).figures, wanted)
        self.assertNotEqual(self.engine.pid, before)

    def test_ctrl_c_at_any_moment_leaves_it_usable(self):
        signal.signal(signal.SIGALRM, lambda *_: signal.raise_signal(signal.SIGINT))
        self.addCleanup(signal.signal, signal.SIGALRM, signal.SIG_DFL)
        table, before, caught = self.engine.hold(self.large), self.engine.pid, 0
        start = time.perf_counter()
        self.engine.how_often(table, count="n", exposure="km", limits="likelihood")
        usual = time.perf_counter() - start
        for turn in range(1, 11):
            try:
                signal.setitimer(signal.ITIMER_REAL, usual * turn / 12)
                self.engine.how_often(table, count="n", exposure="km", limits="likelihood")
                signal.setitimer(signal.ITIMER_REAL, 0)
            except KeyboardInterrupt:
                caught += 1
            self.assertEqual(self.engine.how_often(count=turn).figures["count"], turn)
        self.assertGreater(caught, 0)
        self.assertEqual(self.engine.pid, before)

    def test_time_runs_out(self):
        with self.assertRaises(countsel.Refused) as caught:
            self.engine.how_often(self.large, count="n", exposure="km", limits="likelihood", within_s=0.001)
        self.assertEqual(caught.exception.code, "out_of_time")

    def test_threads_ask_one_engine(self):
        wrong = []

        def ask(own):
            for turn in range(1, 30):
                figures = self.engine.how_often(count=own * 100 + turn, exposure=turn).figures
                if (figures["count"], figures["exposure"]) != (own * 100 + turn, turn):
                    wrong.append((own, turn, figures))

        threads = [threading.Thread(target=ask, args=(own,)) for own in range(6)]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        self.assertEqual(wrong, [])


if __name__ == "__main__":
    unittest.main()
