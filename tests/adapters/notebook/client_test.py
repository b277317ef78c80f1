# tests/adapters/notebook/client_test.py -- does asking survive death, interruption, threads and forks?
#
# Against the invented engine of fake_engine.py, which dies, lingers and babbles on demand.
import multiprocessing
import os
import signal
import threading
import time
import unittest
import warnings

from support import FAKE, python

from countsel import Engine, EngineDied, EngineMissing, EngineTrouble, Refused


class Case(unittest.TestCase):
    def setUp(self):
        self.engine = Engine(FAKE)
        self.addCleanup(self.engine.close)

    def engine_pid(self):
        return self.engine.echo(pips=1).more["pid"]

    def held_names(self):
        return list(self.engine.held().more["more"])


class Death(Case):
    def test_it_is_reported_and_the_next_call_starts_another(self):
        before = self.engine_pid()
        with self.assertRaises(EngineDied) as caught:
            self.engine.die()
        died = caught.exception
        self.assertEqual((died.exit_code, died.question, died.said), (7, "die", "farewell"))
        for part in ("exit code 7", "die", "farewell", "next call"):
            self.assertIn(part, str(died))
        with warnings.catch_warnings():
            warnings.simplefilter("error")  # it has been reported once
            self.assertNotEqual(self.engine_pid(), before)

    def test_a_signal_is_named(self):
        with self.assertRaisesRegex(EngineDied, "killed by SIGKILL") as caught:
            self.engine.die(signal=9)
        self.assertEqual(caught.exception.exit_code, -9)

    def test_killed_from_outside_in_the_middle(self):
        threading.Timer(0.1, os.kill, (self.engine.pid, signal.SIGKILL)).start()
        with self.assertRaises(EngineDied):
            self.engine.linger()
        self.assertEqual(self.engine.echo(pips=2).say, "echo")

    def test_death_between_calls_is_said_and_nothing_is_lost(self):
        self.engine.hold({"n": ["1"]}, "mains")
        before = self.engine.pid
        os.kill(before, signal.SIGKILL)
        while self.engine.pid is not None:
            time.sleep(0.01)
        with self.assertWarnsRegex(RuntimeWarning, "SIGKILL"):
            self.assertEqual(self.held_names(), ["mains"])
        self.assertNotEqual(self.engine.pid, before)

    def test_held_tables_are_sent_again_as_they_were(self):
        table = {"n": [1, 2], "kind": ["a", "b"]}
        handle = self.engine.hold(table, "mains")
        self.engine.hold({"n": [5]}, "gone")
        self.engine.release("gone")
        before = self.engine.held().more["more"]
        table["n"][0] = 99
        with self.assertRaises(EngineDied):
            self.engine.die()
        self.assertEqual(self.engine.held().more["more"], before)
        self.assertEqual(
            self.engine.echo(handle, pips="n").more["request"]["of"], {"held": "mains", "roles": {"pips": "n"}}
        )

    def test_every_waiting_thread_hears_of_it(self):
        heard = []

        def wait():
            try:
                self.engine.linger()
            except EngineDied as died:
                heard.append(died.exit_code)

        threads = [threading.Thread(target=wait) for _ in range(3)]
        for thread in threads:
            thread.start()
        time.sleep(0.1)
        with self.assertRaises(EngineDied):
            self.engine.die()
        for thread in threads:
            thread.join(10)
        self.assertEqual(heard, [7, 7, 7])

    def test_what_does_not_speak_the_wire_is_no_engine(self):
        with self.assertRaisesRegex(EngineTrouble, "is it a Countsel engine"):
            self.engine.babble()
        for program in ("/bin/true", "/bin/cat", "/bin/echo"):
            with self.assertRaises(EngineTrouble):
                Engine(program)
        with self.assertRaises(EngineMissing):
            Engine("/etc/hostname")

    def test_closed_is_closed(self):
        with Engine(FAKE) as engine:
            pid = engine.pid
        with self.assertRaises(ProcessLookupError):
            os.kill(pid, 0)
        with self.assertRaisesRegex(EngineTrouble, "closed"):
            engine.echo(pips=1)

    def test_an_engine_that_nobody_keeps_ends(self):
        engine = Engine(FAKE)
        pid, question = engine.pid, engine.echo
        del engine
        self.assertEqual(question(pips=1).more["pid"], pid)  # its function keeps it
        del question
        with self.assertRaises(ProcessLookupError):
            os.kill(pid, 0)

    def test_the_engine_ends_with_python(self):
        done = python(f"import countsel; print(countsel.Engine({FAKE!r}).pid)", COUNTSEL_ENGINE=FAKE)
        self.assertEqual(done.stderr, "")
        with self.assertRaises(ProcessLookupError):
            os.kill(int(done.stdout), 0)


class Interrupts(Case):
    def interrupted(self, **keywords):
        before = self.engine.pid
        threading.Timer(0.15, os.kill, (os.getpid(), signal.SIGINT)).start()
        start = time.monotonic()
        with self.assertRaises(KeyboardInterrupt):
            self.engine.linger(**keywords)
        self.assertLess(time.monotonic() - start, 5)
        self.assertEqual(self.engine.echo(pips=2).say, "echo")
        self.assertEqual(self.engine.pid, before)

    def test_ctrl_c_cancels_and_leaves_the_engine_usable(self):
        self.interrupted()
        self.interrupted(progress=lambda share, doing: None)

    def test_whatever_the_teller_raises_comes_out_and_cancels(self):
        class Enough(Exception):
            pass

        for error in (Enough, TimeoutError):

            def told(share, doing, error=error):
                raise error

            with self.assertRaises(error):
                self.engine.linger(progress=told)
            self.assertEqual(self.engine.echo(pips=2).say, "echo")

    def test_a_storm_of_interrupts_never_mixes_up_the_answers(self):
        signal.signal(signal.SIGALRM, lambda *_: signal.raise_signal(signal.SIGINT))
        self.addCleanup(signal.signal, signal.SIGALRM, signal.SIG_DFL)
        before, caught = self.engine.pid, 0
        start = time.perf_counter()
        for turn in range(20):
            self.engine.echo(pips=turn)
        usual = (time.perf_counter() - start) / 20
        for turn in range(150):
            try:
                signal.setitimer(signal.ITIMER_REAL, usual * (turn + 1) / 150)  # at every step of the way
                answer = self.engine.echo(pips=turn)
                signal.setitimer(signal.ITIMER_REAL, 0)
                self.assertEqual(answer.more["request"]["of"]["pips"], turn)
            except KeyboardInterrupt:
                caught += 1
        signal.setitimer(signal.ITIMER_REAL, 0)
        self.assertGreater(caught, 10)
        self.assertEqual(self.engine.echo(pips=7).more["request"]["of"]["pips"], 7)
        self.assertEqual(self.engine.pid, before)


class Together(Case):
    def test_threads_get_their_own_answers(self):
        wrong = []

        def ask(own):
            for turn in range(40):
                if self.engine.echo(pips=own * 1000 + turn).more["request"]["of"]["pips"] != own * 1000 + turn:
                    wrong.append((own, turn))

        threads = [threading.Thread(target=ask, args=(own,)) for own in range(8)]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        self.assertEqual(wrong, [])

    def test_a_quick_question_overtakes_a_long_one(self):
        long = threading.Thread(target=self.engine.linger, kwargs={"turns": 400})  # 2 s or more
        long.start()
        self.engine.echo(pips=1)
        self.assertTrue(long.is_alive())
        long.join()

    def test_a_forked_child_has_an_engine_of_its_own(self):
        self.engine.hold({"n": ["1"]}, "mains")
        here = self.engine_pid()
        fork = multiprocessing.get_context("fork")
        told = fork.Queue()

        def child():
            told.put((self.engine_pid(), self.held_names()))

        long = threading.Thread(target=self.engine.linger, kwargs={"turns": 100})
        long.start()  # the fork happens while a question is on its way
        children = [fork.Process(target=child) for _ in range(2)]
        for process in children:
            process.start()
        there = [told.get(timeout=20) for _ in children]
        for process in children:
            process.join(20)
            self.assertEqual(process.exitcode, 0)
        self.assertEqual([names for _, names in there], [["mains"], ["mains"]])
        self.assertEqual(len({here, *(pid for pid, _ in there)}), 3)
        long.join()
        self.assertEqual(self.engine_pid(), here)

    def test_a_large_table_and_a_large_answer(self):
        values = list(range(300_000))
        got = self.engine.echo(pips=list(map(str, values))).more["request"]["of"]["pips"]
        self.assertEqual(got, list(map(str, values)))


class Wire(Case):
    def test_progress_is_told_in_the_asking_thread(self):
        told = []
        self.engine.linger(turns=5, progress=lambda *said: told.append((threading.current_thread(), *said)))
        self.assertEqual([said[1:] for said in told], [(turn / 5, "lingering") for turn in range(5)])
        self.assertEqual({said[0] for said in told}, {threading.current_thread()})

    def test_progress_true_writes_one_line_for_people(self):
        code = f"import countsel; countsel.Engine({FAKE!r}).linger(turns=4, progress=True)"
        done = python(code, COUNTSEL_ENGINE=FAKE)
        self.assertEqual(done.stdout, "")
        self.assertTrue(done.stderr.endswith("\n"))
        self.assertEqual(done.stderr.count("\n"), 1)
        self.assertIn("75% lingering", done.stderr)

    def test_a_refusal_has_its_first_place(self):
        with self.assertRaises(Refused) as caught:
            self.engine.ask({"ask": "refuse"})
        refused = caught.exception
        self.assertEqual((refused.code, refused.column, refused.row, refused.cell), ("bad_count", "pips", 4, "B5"))
        self.assertEqual(str(refused), "Row 4 of pips is -2. Count from 0.")
        self.assertEqual((len(refused.where), refused.hint, refused.question), (2, "Count from 0.", "refuse"))


if __name__ == "__main__":
    unittest.main()
