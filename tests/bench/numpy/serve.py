"""How a yardstick answers the bench: one pass per line asked, CPU time of the whole process, the last result on request.

Lines in: "pass ITEMS" (work on the first ITEMS items), "answer FILE" (last result as float64). Lines out: JSON.
"""
import json
import sys
import time

import numpy as np


def say(**facts):
    print(json.dumps(facts), flush=True)


def serve(work, answer):
    """`work(items)` returns a result; `answer(result)` turns it into numbers that every contender must agree on."""
    result = None
    say(ready=True)
    for line in sys.stdin:
        verb, value = line.split(maxsplit=1)
        value = value.strip()
        if verb == "pass":
            cpu, wall = time.process_time(), time.perf_counter()
            result = work(int(value))
            wall, cpu = time.perf_counter() - wall, time.process_time() - cpu
            say(cpu=cpu, wall=wall)
        else:
            np.asarray(answer(result), np.float64).ravel().tofile(value)
            say(done=True)
