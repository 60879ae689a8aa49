"""The maps of frames.py as they are usually written: four convolutions a frame in double precision."""
import sys

import numpy as np
from scipy.signal import fftconvolve
from serve import serve

folder, side = sys.argv[1], int(sys.argv[2])
frames = np.fromfile(f"{folder}/frames.u16", "<u2").reshape(-1, side, side)


def work(items):
    plus = np.zeros((2 * side - 1, 2 * side - 1))
    minus = np.zeros_like(plus)
    for k in range(items - 1):
        here = frames[k].astype(float)
        after = frames[k + 1].astype(float)
        plus += fftconvolve(here, here) - fftconvolve(here, after)
        minus += fftconvolve(here, here[::-1, ::-1]) - fftconvolve(here, after[::-1, ::-1])
    return plus, (minus + minus[::-1, ::-1]) / 2


serve(work, lambda maps: np.concatenate([maps[0].ravel(), maps[1].ravel()]))
