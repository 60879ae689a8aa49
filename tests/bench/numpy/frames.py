"""Sum- and difference-coordinate maps of consecutive-frame covariance, linear (zero padded to twice the side):
plus = sum_k I_k*I_k - I_k*I_(k+1), minus = the same with correlations, made symmetric.

frames.py FOLDER SIDE fast: real transforms of difference frames in single precision, eight at a time, one product a
frame; end frames put right; totals in double precision; one inverse transform at the end.
frames.py FOLDER SIDE reference: the same from the frames' own spectra in double precision, not timed.
"""
import sys

import numpy as np
import scipy.fft as sf
from serve import serve

folder, side, mode = sys.argv[1], int(sys.argv[2]), sys.argv[3]
PAD, BATCH = 2 * side, 8
frames = np.fromfile(f"{folder}/frames.u16", "<u2").reshape(-1, side, side)


def fast(items):
    plus = np.zeros((PAD, PAD // 2 + 1), np.complex128)
    minus = np.zeros((PAD, PAD // 2 + 1))
    for start in range(0, items - 1, BATCH):
        some = frames[start : min(start + BATCH, items - 1) + 1].astype(np.float32)
        f = sf.rfft2(some[:-1] - some[1:], s=(PAD, PAD), workers=1)
        plus += np.einsum("kij,kij->ij", f, f)
        minus += np.einsum("kij,kij->ij", f.real, f.real) + np.einsum("kij,kij->ij", f.imag, f.imag)
    ends = sf.rfft2(frames[[0, items - 1]].astype(np.float64), s=(PAD, PAD))
    plus += ends[0] ** 2 - ends[1] ** 2
    minus += abs(ends[0]) ** 2 - abs(ends[1]) ** 2
    return sf.irfft2(plus / 2, s=(PAD, PAD)), sf.irfft2(minus / 2, s=(PAD, PAD))


def reference(items):
    plus = np.zeros((PAD, PAD // 2 + 1), np.complex128)
    minus = np.zeros((PAD, PAD // 2 + 1), np.complex128)
    before = None
    for frame in frames[:items]:
        f = sf.rfft2(frame.astype(np.float64), s=(PAD, PAD))
        if before is not None:
            plus += before * (before - f)
            minus += before * np.conj(before - f)
        before = f
    back = sf.irfft2(minus, s=(PAD, PAD))
    mirrored = (-np.arange(PAD)) % PAD
    return sf.irfft2(plus, s=(PAD, PAD)), (back + back[np.ix_(mirrored, mirrored)]) / 2


def answer(maps):
    lags = np.arange(1 - side, side) % PAD
    return np.concatenate([maps[0][:-1, :-1].ravel(), maps[1][np.ix_(lags, lags)].ravel()])


serve(reference if mode == "reference" else fast, answer)
