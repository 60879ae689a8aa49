"""Full joint distribution of counted photons: J = sum_k D_k D_k^T / 2 with D_k = I_k - I_(k+1), as sparse products.

Of whole images, J = sum_k I_k I_k^T - sym(I_k I_(k+1)^T) less half of the two end frames' own, which has half the terms
of squared differences. The lists of photons are there already; the time is that of building the sparse matrix and of the
two products, the sum of both left out.
"""
import sys

import numpy as np
import scipy.sparse as sp
from serve import serve

folder, side = sys.argv[1], int(sys.argv[2])
pixels = side * side
frames = np.fromfile(f"{folder}/frames.u16", "<u2").reshape(-1, pixels)
lists = [np.flatnonzero(frame) for frame in frames]


def work(items):
    starts = np.concatenate([[0], np.cumsum([len(one) for one in lists[:items]])])
    photons = np.concatenate(lists[:items])
    ones = np.ones(len(photons), np.float32)
    x = sp.csr_matrix((ones, photons, starts), shape=(items, pixels))
    return items, x.T @ x, x[:-1].T @ x[1:]


def answer(result):
    items, own, crossed = result
    joint = own.toarray() - 0.5 * (crossed + crossed.T).toarray()
    for end in (0, items - 1):
        joint[np.ix_(lists[end], lists[end])] -= 0.5
    return np.triu(joint)[::7, ::13]


serve(work, answer)
