# tests/protocol/output_test.py -- closed pipes, full disks, and the same bytes for the same request.
import os
import subprocess
import time
import unittest

from wire import ENGINE, PATIENCE, Server, as_line, how_often, run

HELD = as_line({"ask": "held"})


class Output(unittest.TestCase):
    def test_a_closed_output_ends_the_program_quietly(self):
        reading, writing = os.pipe()
        process = subprocess.Popen([ENGINE], stdin=subprocess.PIPE, stdout=writing, stderr=subprocess.PIPE)
        os.close(writing)
        process.stdin.write(HELD)
        process.stdin.flush()
        self.assertTrue(os.read(reading, 1000).endswith(b"\n"))
        os.close(reading)
        _, errors = process.communicate(HELD * 10, timeout=PATIENCE)
        self.assertEqual((process.returncode, errors), (0, b""))

    def test_a_closed_output_ends_a_busy_program_too(self):
        with Server() as server:
            server.send(how_often({"count": list(range(1, 200_000))}))
            server.replies.close()
            server.process.stdout.close()
            self.assertEqual(server.process.wait(PATIENCE), 0)
            self.assertEqual(server.process.stderr.read(), b"")

    def test_a_full_disk_is_said_and_is_a_failure(self):
        with open("/dev/full", "wb") as full:
            done = subprocess.run([ENGINE], input=HELD, stdout=full, stderr=subprocess.PIPE, timeout=PATIENCE)
        self.assertEqual(done.returncode, 3)
        self.assertIn(b"No space left", done.stderr)

    def test_input_or_output_that_was_never_open(self):
        done = subprocess.run(["sh", "-c", f'"{ENGINE}" <&-'], capture_output=True, timeout=PATIENCE)
        self.assertEqual((done.returncode, done.stdout, done.stderr), (0, b"", b""))
        done = subprocess.run(["sh", "-c", f'"{ENGINE}" >&-'], input=HELD, capture_output=True, timeout=PATIENCE)
        self.assertEqual(done.returncode, 3)

    def test_standard_error_is_silent_unless_a_log_is_asked_for(self):
        lines = HELD + b"nonsense\n" + as_line(how_often({"count": 7}, id=5))
        self.assertEqual(run(lines).stderr, b"")
        log = run(lines, "--log").stderr.decode().splitlines()
        self.assertEqual(len(log), 3)
        self.assertRegex(log[0], r"^countsel: - held: answered in \d+\.\d+ ms$")
        self.assertRegex(log[1], r"^countsel: - \?: refused in ")
        self.assertRegex(log[2], r"^countsel: 5 how_often: answered in ")

    def test_pipes_that_do_not_wait(self):
        # Some hosts hand over pipes that return at once; the server waits for them itself.
        (in_reading, in_writing), (out_reading, out_writing) = os.pipe(), os.pipe()
        os.set_blocking(in_reading, False)
        os.set_blocking(out_writing, False)
        process = subprocess.Popen([ENGINE], stdin=in_reading, stdout=out_writing, stderr=subprocess.PIPE)
        os.close(in_reading)
        os.close(out_writing)
        time.sleep(0.05)  # let it find nothing to read
        with open(in_writing, "wb") as writing, open(out_reading, "rb") as reading:
            writing.write(as_line(how_often({"count": [5] * 50_000})))  # the reply is longer than a pipe holds
            writing.close()
            time.sleep(0.05)
            reply = reading.read()
        self.assertEqual((reply.count(b"\n"), reply[-2:]), (1, b"}\n"))
        self.assertEqual(process.wait(PATIENCE), 0)
        self.assertEqual(process.stderr.read(), b"")
        process.stderr.close()

    def test_same_requests_same_bytes_whatever_the_workers(self):
        rows = 5_000
        count, age = [(i * 7919) % 5 for i in range(rows)], [(i * 31) % 97 for i in range(rows)]
        zone = ["NESW"[(i * 13) % 4] for i in range(rows)]
        columns = {"count": count, "exposure": [1 + i % 9 / 8 for i in range(rows)], "age": age, "zone": zone}
        requests = [{"ask": "hold", "of": {"columns": columns}, "with": {"name": "t"}}]
        requests += [
            {"ask": "what_drives", "of": {"held": "t"}, "with": {"errors": errors}} for errors in ("model", "robust")
        ]
        requests += [how_often({"held": "t"}, **{"with": {"limits": limits}}) for limits in ("exact", "mid-p")]
        requests += [
            {
                "ask": "which_higher",
                "of": {
                    "held": "t",
                    "only": {"zone": ["N", "E"]},
                    "roles": {"count": "count", "exposure": "exposure", "group": "zone"},
                },
            },
            how_often({"count": [1, -1]}),
            "nonsense",
        ]
        data = b"".join(map(as_line, requests))
        first = run(data, "--workers", "1").stdout
        self.assertEqual(first.count(b"\n"), len(requests))
        self.assertEqual(run(data, "--workers", "2").stdout, first)
        self.assertEqual(run(data, "--workers", "7").stdout, first)
        self.assertEqual(run(data).stdout, first)


if __name__ == "__main__":
    unittest.main()
