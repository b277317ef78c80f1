# tests/protocol/stopping_slow_test.py -- cancel and within_s stop a running fit within 50 ms.
#
# The time is taken from the cancel's reply, or from the end of the time allowed, to the fit's refusal. A
# machine with other work to do is given further tries: one of five must keep the time, and on a quiet
# machine every one does.
import threading
import time
import unittest

from wire import Server, packed

LIMIT = 0.05
TRIES = 5
ROWS = 1_000_000


def columns():
    made = {"count": packed((i * 7) % 5 for i in range(ROWS))}
    for j in range(8):
        made[f"x{j}"] = packed((i * (2 * j + 3)) % 101 for i in range(ROWS))
    made["zone"] = {"levels": [f"z{k}" for k in range(40)], "codes": [(i * 17) % 40 for i in range(ROWS)]}
    made["soil"] = {"levels": [f"s{k}" for k in range(25)], "codes": [(i * 11) % 25 for i in range(ROWS)]}
    return made


FIT = {
    "ask": "what_drives",
    "of": {"held": "big"},
    "with": {"terms": [*(f"x{j}" for j in range(8)), "zone", "soil", {"cross": ["zone", "soil"]}], "errors": "robust"},
}


class Stopping(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.server = Server()
        reply = cls.server.ask({"ask": "hold", "of": {"columns": columns()}, "with": {"name": "big"}})
        assert "answer" in reply, reply
        cls.server.ask({"ask": "hello", "with": {"order": "as_finished"}})

    @classmethod
    def tearDownClass(cls):
        cls.server.__exit__()

    def best_of(self, tried):
        took = []
        for attempt in range(TRIES):
            took.append(tried(attempt))
            if took[-1] < LIMIT:
                break
        self.assertLess(min(took), LIMIT, took)

    def test_cancel_at_any_moment_of_the_fit(self):
        for after in (0.001, 0.02, 0.1, 0.3, 0.7, 1.5):

            def tried(attempt, after=after):
                name = f"cancel {after} {attempt}"
                self.server.send(FIT | {"id": name})
                time.sleep(after)
                sent = time.perf_counter()
                self.server.send({"ask": "cancel", "of": {"id": name}, "id": "c" + name})
                replies = {}
                while len(replies) < 2:
                    reply = self.server.reply()
                    replies[reply["id"]] = reply
                took = time.perf_counter() - sent
                if "answer" in replies[name]:  # a fast machine was done before
                    self.assertEqual(replies["c" + name]["refused"]["code"], "not_found")
                    return 0
                self.assertEqual(replies[name]["refused"]["code"], "cancelled")
                return took

            with self.subTest(after=after):
                self.best_of(tried)

    def test_within_s(self):
        for allowed in (0.001, 0.03, 0.2, 0.6):

            def tried(attempt, allowed=allowed):
                sent = time.perf_counter()
                reply = self.server.ask(FIT | {"within_s": allowed})
                took = time.perf_counter() - sent - allowed
                if "answer" in reply:
                    return 0
                self.assertEqual(reply["refused"]["code"], "out_of_time")
                return took

            with self.subTest(allowed=allowed):
                self.best_of(tried)

    def test_other_requests_are_answered_while_a_fit_runs(self):
        self.server.send(FIT | {"id": "fit"})
        time.sleep(0.05)
        replies = []
        listening = threading.Thread(target=lambda: replies.append(self.server.reply()))
        listening.start()
        self.server.send({"ask": "held", "id": "held"})
        listening.join(5)
        self.assertEqual(replies[0]["id"], "held")
        self.server.send({"ask": "cancel", "of": {"id": "fit"}, "id": "cancel"})
        self.assertEqual({self.server.reply()["id"], self.server.reply()["id"]}, {"fit", "cancel"})


if __name__ == "__main__":
    unittest.main()
