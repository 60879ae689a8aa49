"""All-pairs delay histogram of two sorted lists: |tau| < 100 ns in 10 000 bins of 20 ps, one tick 1 ps.

One search per event of the first list, then its next partner, the one after that ..., each for all events at once;
chunked over the first list so that temporaries stay in the cache. (Repeating every event by its number of partners is
the usual way and slower.)
"""
import sys

import numpy as np
from serve import serve

folder = sys.argv[1]
CHUNK, REACH, BINS = 16384, 100_000, 10_000
BIN = 2 * REACH // BINS
LAST = np.iinfo(np.int64).max
first = np.fromfile(f"{folder}/a.i64", "<i8")
second = np.fromfile(f"{folder}/b.i64", "<i8")


def work(items):
    counts = np.zeros(BINS, np.int64)
    a = first[: items // 2]
    whole = second[: items // 2]
    for start in range(0, len(a), CHUNK):
        x = a[start : start + CHUNK]
        low, high = np.searchsorted(whole, [x[0] - REACH, x[-1] + REACH])
        near = np.append(whole[low:high], LAST)
        from_tick = x - REACH
        at = np.searchsorted(near, from_tick)
        while len(at):
            delay = near[at] - from_tick
            within = delay < 2 * REACH
            delay = delay[within]
            if not len(delay):
                break
            counts += np.bincount(delay // BIN, minlength=BINS)
            at = at[within] + 1
            from_tick = from_tick[within]
            more = at < len(near)
            at = at[more]
            from_tick = from_tick[more]
    return counts


serve(work, lambda counts: counts)
