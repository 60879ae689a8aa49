"""64 x 64 coincidence matrix, |tau| <= 2 ns, from one time-ordered stream (sites 0..63 signal, 64..127 idler).

The k-th neighbour of every event for k = 1, 2, ... until none is near, chunked so that temporaries stay in the cache.
"""
import sys

import numpy as np
from serve import serve

folder = sys.argv[1]
CHUNK, REACH, SIDE = 32768, 2000, 64
times = np.fromfile(f"{folder}/merged.i64", "<i8")
sites = np.fromfile(f"{folder}/merged.u16", "<u2")


def work(items):
    counts = np.zeros(SIDE * SIDE, np.int64)
    for start in range(0, items, CHUNK):
        stop = min(start + CHUNK, items)
        k = 1
        while True:
            later = times[start + k : min(stop + k, items)]
            near = np.nonzero(later - times[start : start + len(later)] <= REACH)[0]
            if not len(near):
                break
            p = sites[start + near].astype(np.int64)
            q = sites[start + k + near].astype(np.int64)
            crossed = ((p ^ q) & SIDE) != 0
            p = p[crossed]
            q = q[crossed]
            counts += np.bincount(np.minimum(p, q) * SIDE + np.maximum(p, q) - SIDE, minlength=SIDE * SIDE)
            k += 1
    return counts


serve(work, lambda counts: counts)
