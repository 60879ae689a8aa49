"""Heralded image of a 32 x 32 array and the same in a shifted, accidental window, from two sorted lists.

An array event counts once for every bucket event with 25 ns (225 ns) before it, 1.5 ns either way.
One search per array event and window, then its candidates one after the other, all events at once; chunked.
"""
import sys

import numpy as np
from serve import serve

folder = sys.argv[1]
CHUNK, HALF, PIXELS = 16384, 1500, 1024
DELAYS = (25_000, 225_000)
LAST = np.iinfo(np.int64).max
bucket = np.fromfile(f"{folder}/bucket.i64", "<i8")
array = np.fromfile(f"{folder}/array.i64", "<i8")
pixel = np.fromfile(f"{folder}/array.u16", "<u2")


def work(items):
    images = np.zeros((2, PIXELS), np.int64)
    b, a = bucket[: items // 2], array[: items // 2]
    for start in range(0, len(a), CHUNK):
        x = a[start : start + CHUNK]
        low, high = np.searchsorted(b, [x[0] - DELAYS[1] - HALF, x[-1] - DELAYS[0] + HALF + 1])
        near = np.append(b[low:high], LAST)
        for image, delay in zip(images, DELAYS):
            at = np.searchsorted(near, x - (delay + HALF))
            last = x - (delay - HALF)
            p = pixel[start : start + len(x)]
            while True:
                within = np.nonzero(near[at] <= last)[0]
                if not len(within):
                    break
                at = at[within]
                last = last[within]
                p = p[within]
                image += np.bincount(p, minlength=PIXELS)
                at = at + 1
    return images


serve(work, lambda images: images)
