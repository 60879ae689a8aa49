"""Full joint distribution of difference frames: J = sum_k D_k D_k^T / 2, D_k = I_k - I_(k+1), upper triangle by BLAS."""
import sys

import numpy as np
import scipy.linalg.blas as blas
from serve import serve

folder, side = sys.argv[1], int(sys.argv[2])
pixels, BATCH = side * side, 512
frames = np.fromfile(f"{folder}/frames.u16", "<u2").reshape(-1, pixels)


def work(items):
    joint = np.zeros((pixels, pixels), np.float32, order="F")
    for start in range(0, items - 1, BATCH):
        some = frames[start : min(start + BATCH, items - 1) + 1].astype(np.float32)
        difference = some[:-1] - some[1:]
        joint = blas.ssyrk(1.0, difference.T, beta=1.0, c=joint, overwrite_c=1)
    return joint


def answer(joint):
    return 0.5 * np.triu(joint)[::7, ::13]


serve(work, answer)
