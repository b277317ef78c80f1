# tests/protocol/replies_test.py -- ids, the order of replies, and what a request sees of those before it.
import json
import unittest

from wire import Server, as_line, exchange, how_often, packed, run

SMALL = {"count": 7, "exposure": 1200}


def busy(rows=200_000, **rest):
    """A request that keeps a worker busy for a while, though its reply is short: every count differs."""
    return how_often({"count": packed(range(1, rows + 1))}, want=["figures"], **rest)


class Ids(unittest.TestCase):
    def test_ids_are_echoed_as_they_were_written(self):
        ids = [
            "0", "-1", "7", "-0", "9007199254740993", "18446744073709551615", "18446744073709551616", "-9223372036854775809",
            "123456789012345678901234567890", '""', '"7"', '"a b"', '"\\u0061"', '"\\/\\"\\\\\\n\\t\\u00e9\\ud83d\\ude00"', '"é😀"',
        ]  # fmt: skip
        lines = [f'{{"id":{id_},"ask":"held"}}' for id_ in ids] + [f'{{"ask":"held", "id" : {id_} }}' for id_ in ids]
        replies = run("\n".join(lines).encode()).stdout.decode().splitlines()
        for id_, reply in zip(ids * 2, replies, strict=True):
            self.assertTrue(reply.startswith(f'{{"id":{id_},"ask":"held",'), (id_, reply[:80]))

    def test_an_id_across_the_readers_buffer(self):
        for before in range(262_100, 262_160, 7):
            line = '{"want":["' + "x" * before + '"],"id":"a\\u0062\\n' + "y" * 50 + '","ask":"held"}'
            reply = run(line.encode()).stdout.decode()
            self.assertTrue(reply.startswith('{"id":"a\\u0062\\n' + "y" * 50 + '","ask"'), reply[:80])

    def test_the_id_is_echoed_where_it_was_read_before_the_trouble(self):
        replies = exchange(
            ['{"id":1,"ask":"held",', '{"id":2,"ask":"held","of":{"a":[1e999]}}', '{"id":1.5,"ask":"held"}']
        )
        self.assertEqual([reply.get("id") for reply in replies], [1, 2, 1.5])

    def test_a_pending_id_is_refused(self):
        replies = exchange(
            [
                busy(id=1),
                how_often(SMALL, id=1),
                how_often(SMALL, id="1"),
                '{"ask":"held","id":"\\u0031"}',
                how_often(SMALL, id=2),
            ]
        )
        outcomes = [next(iter(reply.get("refused", {"code": "answered"}).values())) for reply in replies]
        self.assertEqual(outcomes[:3], ["answered", "bad_value", "answered"])
        self.assertIn("still pending", replies[1]["refused"]["text"])
        self.assertEqual(outcomes[4], "answered")

    def test_an_id_is_free_again_once_its_reply_is_there(self):
        with Server() as server:
            for _ in range(3):
                self.assertIn("answer", server.ask(how_often(SMALL, id=1)))

    def test_requests_without_id_may_pend_together(self):
        replies = exchange([busy(), how_often(SMALL), how_often(SMALL)])
        self.assertTrue(all("answer" in reply for reply in replies))


class Order(unittest.TestCase):
    def test_replies_come_in_request_order(self):
        requests = []
        for i in range(60):
            of = SMALL if i % 3 else {"count": -1}
            requests.append(busy(40_000, id=i) if i % 10 == 0 else how_often(of, id=i))
        replies = exchange(requests, "--workers", "2")
        self.assertEqual([reply["id"] for reply in replies], list(range(60)))

    def test_as_finished_lets_quick_ones_overtake(self):
        requests = [
            {"ask": "hello", "with": {"order": "as_finished"}},
            busy(600_000, id="slow"),
            how_often(SMALL, id="quick"),
            {"ask": "held", "id": "held"},
        ]
        replies = exchange(requests, "--workers", "2")
        ids = [reply.get("id") for reply in replies]
        self.assertEqual(set(ids), {None, "slow", "quick", "held"})
        self.assertEqual(ids[-1], "slow")

    def test_the_order_can_be_changed_back(self):
        requests = [{"ask": "hello", "with": {"order": "as_finished"}}, {"ask": "hello", "with": {"order": "as_asked"}}]
        requests += [busy(200_000, id=1), how_often(SMALL, id=2), {"ask": "hello", "id": 3}]
        replies = exchange(requests, "--workers", "2")
        self.assertEqual([reply.get("id") for reply in replies], [None, None, 1, 2, 3])

    def test_a_request_sees_every_hold_and_release_before_it(self):
        hold = {"ask": "hold", "with": {"name": "t"}}
        for order in ("as_asked", "as_finished"):
            requests = [
                {"ask": "hello", "with": {"order": order}},
                busy(id="busy"),
                hold | {"of": {"columns": {"count": [1] * 100_000}}, "id": "hold"},
                how_often({"held": "t"}, id="first"),
                {"ask": "release", "with": {"name": "t"}, "id": "release"},
                how_often({"held": "t"}, id="gone"),
                hold | {"of": {"columns": {"count": [5]}}, "id": "again"},
                how_often({"held": "t"}, id="second"),
            ]
            replies = {reply.get("id"): reply for reply in exchange(requests, "--workers", "2")}
            self.assertEqual(replies["first"]["answer"]["figures"]["count"], 100_000)
            self.assertEqual(replies["gone"]["refused"]["code"], "not_found")
            self.assertEqual(replies["second"]["answer"]["figures"]["count"], 5)

    def test_at_the_end_of_input_every_pending_request_is_answered(self):
        requests = [busy(100_000, id=i) for i in range(5)]
        done = run(b"".join(map(as_line, requests)))
        self.assertEqual(done.returncode, 0)
        self.assertEqual([json.loads(line)["id"] for line in done.stdout.splitlines()], list(range(5)))

    def test_goodbye_answers_what_is_pending_then_ends(self):
        requests = [busy(100_000, id=1), {"ask": "goodbye", "id": 2}, how_often(SMALL, id=3)]
        self.assertEqual([reply["id"] for reply in exchange(requests)], [1, 2])
        with Server() as server:
            self.assertIn("answer", server.ask({"ask": "goodbye"}))
            self.assertIsNone(server.reply())
            self.assertEqual(server.process.wait(10), 0)


class Cancelling(unittest.TestCase):
    def test_a_pending_request_is_answered_cancelled_in_its_turn(self):
        requests = [busy(id=1), busy(100_000, id=2), busy(100_000, id=3)]
        requests += [{"ask": "cancel", "of": {"id": 3}, "id": 4}]
        replies = exchange(requests, "--workers", "1")
        self.assertEqual([reply["id"] for reply in replies], [1, 2, 3, 4])
        self.assertEqual(replies[2]["refused"]["code"], "cancelled")
        self.assertEqual(replies[2]["ask"], "how_often")
        self.assertIn("answer", replies[3])

    def test_ids_are_compared_by_what_they_say(self):
        for written, sent in (
            ("7", "7"),
            ('"a"', '"\\u0061"'),
            ("18446744073709551616", "18446744073709551616"),
            ('"7"', '"7"'),
        ):
            lines = [busy(id=1)]
            lines += [
                f'{{"id":{written},"ask":"how_often","of":{{"count":[{",".join("12345"[i % 5] for i in range(5000))}]}}}}'
            ]
            lines += [f'{{"ask":"cancel","of":{{"id":{sent}}}}}']
            replies = exchange(lines, "--workers", "1")
            self.assertEqual(replies[1]["refused"]["code"], "cancelled", (written, replies[2]))

    def test_what_cannot_be_cancelled(self):
        replies = exchange(
            [
                {"ask": "cancel", "of": {"id": 9}},
                {"ask": "cancel"},
                {"ask": "cancel", "of": {}},
                {"ask": "cancel", "of": {"id": None}},
                {"ask": "cancel", "of": {"id": [1]}},
                {"ask": "cancel", "of": {"id": True}},
                {"ask": "cancel", "of": {"id": 5}, "id": 5},
                how_often(SMALL, id=7),
                {"ask": "cancel", "of": {"id": 7}},
            ]
        )
        codes = [reply.get("refused", {}).get("code") for reply in replies]
        self.assertEqual(
            codes,
            ["not_found", "missing", "missing", "missing", "bad_type", "bad_type", "not_found", None, "not_found"],
        )

    def test_cancelled_twice(self):
        requests = [busy(id=1), busy(100_000, id=2)]
        requests += [{"ask": "cancel", "of": {"id": 2}, "id": 3}, {"ask": "cancel", "of": {"id": 2}, "id": 4}]
        replies = exchange(requests, "--workers", "1")
        self.assertEqual(replies[1]["refused"]["code"], "cancelled")
        self.assertIn("answer", replies[2])
        self.assertEqual(replies[3]["refused"]["code"], "not_found")


if __name__ == "__main__":
    unittest.main()
