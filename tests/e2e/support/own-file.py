"""
Writes an HDF5 file the way a group of its own would, with h5py: other names, a compound of times and a separate table of
what the page must not take for tags. Prints the joint maps it must give, counted here without Gemel.

Usage: own-file.py OUT.h5
"""

import json
import sys

import h5py
import numpy as np

SIDE = 4
TICK_PS = 25
DELAY_TICKS = 37
PAIRS = 6000
rng = np.random.default_rng(20261201)

# One pair every 4 us, so that no two pairs meet in any window; position of the idler is that of the signal or one beside.
start = np.arange(PAIRS, dtype=np.int64) * 160_000 + rng.integers(0, 1000, PAIRS)
xs = rng.integers(0, SIDE, PAIRS)
ys = rng.integers(0, SIDE, PAIRS)
xi = np.clip(xs + rng.integers(-1, 2, PAIRS), 0, SIDE - 1)
yi = np.clip(ys + rng.integers(-1, 2, PAIRS), 0, SIDE - 1)
jitter = np.rint(rng.normal(0, 6, PAIRS)).astype(np.int64)

time = np.concatenate([start, start + DELAY_TICKS + jitter])
line = np.concatenate([100 + ys * SIDE + xs, 300 + yi * SIDE + xi])
order = np.argsort(time, kind="stable")
clicks = np.zeros(2 * PAIRS, dtype=[("stamp", "<u8"), ("line", "<u2")])
clicks["stamp"] = time[order]
clicks["line"] = line[order]

with h5py.File(sys.argv[1], "w", libver="latest") as out:
    night = out.create_group("night 12")
    night.create_dataset("clicks", data=clicks, chunks=(1000,), compression="gzip", shuffle=True)
    # Integers as well, and longer: a careless proposal would take them.
    out.create_dataset("housekeeping", data=rng.integers(0, 2**31, 40_000, dtype=np.int64))

joint_x = np.zeros((SIDE, SIDE), dtype=int)
np.add.at(joint_x, (xi, xs), 1)
joint_y = np.zeros((SIDE, SIDE), dtype=int)
np.add.at(joint_y, (yi, ys), 1)
print(json.dumps({"tickPs": TICK_PS, "jointX": joint_x.ravel().tolist(), "jointY": joint_y.ravel().tolist()}))
