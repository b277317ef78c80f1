#!/usr/bin/python3
"""tests/bench/wire.py -- what the wire costs: cold start, round trip, reading a large request.

  wire.py BUILD     BUILD holds countsel, and bench_echo and bench_read after
                    cmake --build BUILD --target countsel bench_echo bench_read

Prints each measure with its goal; exit status 1 if one is missed. Times are of the whole way, seen from outside:
the start of the process until its first reply has been read, the writing of a request until its reply has been read.
The echo does nothing but give a line back over pipes of the same kind. Both are asked in turns, and the best of many
short runs is taken, so that other work on the machine disturbs both alike.
"""

import json
import os
import statistics
import subprocess
import sys
import time
from pathlib import Path

REQUEST = (
    json.dumps(
        {
            "id": 1,
            "ask": "how_often",
            "of": {"count": [3, 0, 5], "exposure": [1200, 800, 1500], "label": ["North", "East", "South"]},
            "with": {"per": 1000},
            "words": {"event": "fall", "events": "falls", "exposure": "bed-days"},
        }
    ).encode()
    + b"\n"
)


class Process:
    def __init__(self, path):
        self.process = subprocess.Popen([path], stdin=subprocess.PIPE, stdout=subprocess.PIPE, bufsize=0)
        self.into, self.out = self.process.stdin.fileno(), self.process.stdout.fileno()

    def round_trip(self):
        os.write(self.into, REQUEST)
        reply = os.read(self.out, 1 << 16)
        while not reply.endswith(b"\n"):
            reply += os.read(self.out, 1 << 16)
        return reply

    def end(self):
        self.process.stdin.close()
        self.process.stdout.close()
        self.process.wait()


def cold_start(path, times=60):
    took = []
    for _ in range(times):
        start = time.perf_counter()
        process = Process(path)
        process.round_trip()
        took.append(time.perf_counter() - start)
        process.end()
    return took


def round_trips(paths, rounds=60, trips=200):
    """The seconds of one round trip for each program: the best of rounds, the programs in turns."""
    processes = [Process(path) for path in paths]
    best = [float("inf")] * len(paths)
    for _ in range(rounds):
        for i, process in enumerate(processes):
            start = time.perf_counter()
            for _ in range(trips):
                process.round_trip()
            best[i] = min(best[i], (time.perf_counter() - start) / trips)
    for process in processes:
        process.end()
    return best


def main():
    build = Path(sys.argv[1])
    engine, echo = build / "countsel", build / "tests/bench/bench_echo"
    met = []

    took = cold_start(engine)
    start, median = min(took), statistics.median(took)
    plain = min(cold_start(echo))
    met.append(start < 0.010)
    print(
        f"cold start to first reply   {1e3 * start:.2f} ms (median {1e3 * median:.2f}; echo {1e3 * plain:.2f})   goal below 10 ms"
    )

    ours, theirs = round_trips([engine, echo])
    met.append(ours < 3 * theirs)
    print(
        f"round trip of a how_often   {1e6 * ours:.1f} us, echo {1e6 * theirs:.1f} us: {ours / theirs:.2f} times   goal below 3 times"
    )

    reading = subprocess.run([build / "tests/bench/bench_read"], check=False)
    met.append(reading.returncode == 0)
    return 0 if all(met) else 1


if __name__ == "__main__":
    sys.exit(main())
