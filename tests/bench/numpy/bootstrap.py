"""Block bootstrap of the widths of a peak: resampled maps as one matrix product, a two-dimensional Gaussian fitted to each.

Separable model and analytic derivatives; every fit starts from the fit of the whole, as close as can be had.
"""
import sys

import numpy as np
from scipy.optimize import curve_fit
from serve import serve

folder, blocks, side = sys.argv[1], int(sys.argv[2]), int(sys.argv[3])
maps = np.fromfile(f"{folder}/maps.f64", "<f8").reshape(blocks, -1).astype(np.float32)
weights = np.fromfile(f"{folder}/weights.u8", "u1").reshape(-1, blocks).astype(np.float32)
at = np.arange(side, dtype=float)


def parts(a, b, s, t):
    return np.exp(-((at - a) ** 2) / (2 * s * s)), np.exp(-((at - b) ** 2) / (2 * t * t))


def model(_, height, a, b, s, t, offset):
    ex, ey = parts(a, b, s, t)
    return (height * np.outer(ey, ex) + offset).ravel()


def derivatives(_, height, a, b, s, t, offset):
    ex, ey = parts(a, b, s, t)
    unit = np.outer(ey, ex)
    peak = height * unit
    return np.stack(
        [
            unit,
            peak * ((at - a) / s**2)[None],
            peak * ((at - b) / t**2)[:, None],
            peak * ((at - a) ** 2 / s**3)[None],
            peak * ((at - b) ** 2 / t**3)[:, None],
            np.ones_like(unit),
        ],
        -1,
    ).reshape(-1, 6)


def fit(image, start):
    return curve_fit(model, None, image, p0=start, jac=derivatives)[0]


def work(items):
    whole = maps.sum(axis=0, dtype=float)
    start = fit(whole, (whole.max() - np.median(whole), side / 2, side / 2, side / 10, side / 10, np.median(whole)))
    images = (weights[:items] @ maps).astype(float)
    return np.array([np.abs(fit(image, start)[3:5]) for image in images])


serve(work, lambda widths: widths)
