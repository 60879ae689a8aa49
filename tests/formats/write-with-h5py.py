"""Writes what a group's own scripts might: names, types and storage of their own. Argument: folder."""

import sys

import h5py
import numpy as np

folder = sys.argv[1]
n = 4000
i = np.arange(n)
when = (2**53 - 6000 + 3 * i + (i > 2500) * 2**58).astype("u8")
where = ((i * 53) % 1024).astype("u2")
stack = ((np.arange(30 * 12 * 20) * 7919) % 250).reshape(30, 12, 20)

for version in ("earliest", "latest"):
    def path(name):
        return f"{folder}/{name}-{version}"

    with h5py.File(path("compound"), "w", libver=version) as f:
        rows = np.zeros(n, dtype=[("fired_at", "<u8"), ("element", "<u2"), ("quality", "u1")])
        rows["fired_at"], rows["element"] = when, where
        f.create_dataset("shots/log", data=rows, chunks=(333,), compression="gzip")
    with h5py.File(path("columns"), "w", libver=version) as f:
        f["both"] = np.stack([where.astype("i8"), when.astype("i8")], axis=1)
    with h5py.File(path("big-endian"), "w", libver=version) as f:
        f.create_dataset("run/zeit", data=when.astype(">u8"), chunks=(700,), compression="gzip", shuffle=True)
        f.create_dataset("run/ort", data=where.astype(">u2"), chunks=(900,), fletcher32=True)
        f["run"].attrs["resolution_ps"] = 81.0
    with h5py.File(path("small"), "w", libver=version) as f:
        f["t32"] = (7 * i).astype(">u4")
        f.create_dataset("c16", data=where, chunks=(512,), compression="gzip", shuffle=True, fletcher32=True)
    with h5py.File(path("resizable"), "w", libver=version) as f:
        t = f.create_dataset("t", shape=(0,), maxshape=(None,), dtype="u8", chunks=(256,))
        c = f.create_dataset("c", shape=(0,), maxshape=(None,), dtype="i4", chunks=(300,))
        for start in range(0, n, 1000):
            t.resize((start + 1000,))
            c.resize((start + 1000,))
            t[start:] = when[start : start + 1000]
            c[start:] = where[start : start + 1000]
    with h5py.File(path("frames"), "w", libver=version) as f:
        f.create_dataset("camera/shots", data=stack.astype(">u2"), chunks=(7, 5, 20), compression="gzip", shuffle=True)
    with h5py.File(path("mixed-order"), "w", libver=version) as f:
        rows = np.zeros(n, dtype=[("t", ">u8"), ("c", "<u2"), ("d", ">i4")])
        rows["t"], rows["c"], rows["d"] = when, where, -where.astype("i4")
        f["events"] = rows
    with h5py.File(path("lzf"), "w", libver=version) as f:
        f.create_dataset("t", data=when, compression="lzf")
        f.create_dataset("c", data=where)
    for name, shape in [("channel", (30, 1, 12, 20)), ("colour", (30, 12, 20, 1)), ("run", (1, 30, 12, 20))]:
        with h5py.File(path(f"frames-{name}"), "w", libver=version) as f:
            f.create_dataset("shots", data=stack.astype(">u2").reshape(shape), chunks=True, compression="gzip")
    with h5py.File(path("frames-half"), "w", libver=version) as f:
        f["shots"] = stack.astype("f2")
    with h5py.File(path("frames-plain"), "w", libver=version) as f:
        f["shots"] = stack.astype("u1")
    with h5py.File(path("holes"), "w", libver=version) as f:
        d = f.create_dataset("shots", shape=(30, 12, 20), dtype="u2", chunks=(5, 12, 20), fillvalue=9)
        d[:10] = stack[:10]
    with h5py.File(path("userblock"), "w", libver=version, userblock_size=1024) as f:
        f["t"], f["c"] = when, where
    with h5py.File(path("foreign"), "w", libver=version) as f:
        f["t"] = when
        f["elsewhere"] = h5py.ExternalLink(f"small-{version}", "/c16")
        f["again"] = h5py.SoftLink("/t")
        f["cycle"] = h5py.SoftLink("/")
        layout = h5py.VirtualLayout(shape=(n,), dtype="u2")
        layout[:] = h5py.VirtualSource(f"gone-{version}", "c16", shape=(n,))
        f.create_virtual_dataset("joined", layout)
