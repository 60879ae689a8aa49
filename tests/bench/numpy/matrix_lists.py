"""64 x 64 coincidence matrix, |tau| <= 2 ns, from two sorted lists with their pixels.

One search per event of the first list, then its candidates one after the other, all events at once; chunked.
"""
import sys

import numpy as np
from serve import serve

folder = sys.argv[1]
CHUNK, REACH, SIDE = 16384, 2000, 64
LAST = np.iinfo(np.int64).max
signal = np.fromfile(f"{folder}/s.i64", "<i8")
signal_pixel = np.fromfile(f"{folder}/s.u16", "<u2")
idler = np.fromfile(f"{folder}/i.i64", "<i8")
idler_pixel = np.fromfile(f"{folder}/i.u16", "<u2")


def work(items):
    counts = np.zeros(SIDE * SIDE, np.int64)
    a, b = signal[: items // 2], idler[: items // 2]
    for start in range(0, len(a), CHUNK):
        x = a[start : start + CHUNK]
        p = signal_pixel[start : start + len(x)]
        low, high = np.searchsorted(b, [x[0] - REACH, x[-1] + REACH + 1])
        near = np.append(b[low:high], LAST)
        q = idler_pixel[low:high]
        at = np.searchsorted(near, x - REACH)
        last = x + REACH
        who = np.arange(len(x))
        while True:
            within = np.nonzero(near[at] <= last)[0]
            if not len(within):
                break
            at = at[within]
            last = last[within]
            who = who[within]
            counts += np.bincount(p[who].astype(np.int64) * SIDE + q[at], minlength=SIDE * SIDE)
            at = at + 1
    return counts


serve(work, lambda counts: counts)
