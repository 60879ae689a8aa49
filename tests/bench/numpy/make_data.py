"""Invented data of the bench, the same at every run: make_data.py KIND FOLDER ITEMS [ARGS]. Ticks are 1 ps."""
import sys

import numpy as np

kind, folder, items = sys.argv[1], sys.argv[2], int(sys.argv[3])
rest = sys.argv[4:]
rng = np.random.default_rng([20, *f"{kind} {' '.join(rest)}".encode()])


def save(name, values, dtype):
    np.ascontiguousarray(values, dtype).tofile(f"{folder}/{name}")


def poisson(count, mean):
    """Ticks of `count` events, `mean` ticks apart in the mean."""
    return 1_000_000 + np.cumsum(rng.exponential(mean, count)).astype(np.int64)


def save_list(name, times, sites=None):
    order = np.argsort(times, kind="stable")
    save(f"{name}.i64", times[order], "<i8")
    if sites is not None:
        save(f"{name}.u16", sites[order], "<u2")


def jitter(count, sigma):
    return np.rint(rng.normal(0, sigma, count)).astype(np.int64)


def records_8():
    """A rollover marker in five million records, 40 channels."""
    times = np.cumsum(rng.exponential(500_000, items).astype(np.uint64))
    records = (times & np.uint64((1 << 48) - 1)) | (rng.integers(0, 40, items, np.uint64) << np.uint64(48))
    records[rng.integers(0, items, 1 + items // 5_000_000)] = np.uint64(1 << 63)
    save("records.bin", records, "<u8")


def records_4():
    """A rollover marker wherever bit 25 changes, about one record in 68; 5 channels."""
    times = np.cumsum(rng.exponential(500_000, items).astype(np.int64))
    epoch = times >> 25
    rollovers = np.diff(epoch, prepend=0)
    marked = rollovers > 0
    at = np.arange(items) + np.cumsum(marked)
    records = np.zeros(items + int(marked.sum()), np.uint32)
    records[at] = (rng.integers(0, 5, items) << 25) | (times & ((1 << 25) - 1))
    records[at[marked] - 1] = (1 << 31) | (63 << 25) | rollovers[marked]
    save("records.bin", records[:items], "<u4")


def histogram():
    """Two detectors of 1 MHz; one click in five belongs to a pair, 12 ns apart, 300 ps jitter each."""
    each = items // 2
    pairs, noise = each // 5, each - each // 5
    start = poisson(pairs, 5e6)
    save_list("a", np.concatenate([poisson(noise, 1.25e6), start + jitter(pairs, 300)]))
    save_list("b", np.concatenate([poisson(noise, 1.25e6), start + 12_000 + jitter(pairs, 300)]))


def matrix():
    """Two arrays of 64 pixels, 2 MHz each; 15 % of the clicks in anticorrelated pairs, 200 ps jitter each."""
    each = items // 2
    pairs = each * 15 // 100
    noise = each - pairs
    start = poisson(pairs, 5e5 * each / pairs)
    x = rng.integers(0, 64, pairs)
    y = np.clip(63 - x + np.rint(1.2 * rng.normal(size=pairs)).astype(int), 0, 63)
    lists = []
    for partner in (x, y):
        times = np.concatenate([start + jitter(pairs, 200), poisson(noise, 5e5 * each / noise)])
        sites = np.concatenate([partner, rng.integers(0, 64, noise)])
        lists.append((times, sites))
    (s, p), (i, q) = lists
    save_list("s", s, p)
    save_list("i", i, q)
    save_list("merged", np.concatenate([s, i]), np.concatenate([p, q + 64]))


def heralded():
    """A bucket and a 32 x 32 array of 1 MHz; 12 % of the array's clicks are twins, 25 ns late, behind a ring-like mask."""
    each = items // 2
    pairs = each * 12 // 100
    start = poisson(pairs, 1e6 * each / pairs)
    x, y = rng.integers(0, 32, pairs), rng.integers(0, 32, pairs)
    opened = ((x - 16) ** 2 + (y - 16) ** 2 < 100) & (abs(x - 16) >= 3)
    array = np.concatenate([start + 25_000 + jitter(pairs, 500), poisson(each - pairs, 1e6 * each / (each - pairs))])
    pixel = np.concatenate([y * 32 + x, rng.integers(0, 1024, each - pairs)])
    left = each - int(opened.sum())
    bucket = np.concatenate([start[opened], poisson(left, 1e6 * each / left)])
    save_list("bucket", bucket)
    save_list("array", array, pixel)
    sites = np.concatenate([np.zeros(each, np.int64), 1 + pixel])
    save_list("merged", np.concatenate([bucket, array]), sites)


def photons(side, occupancy):
    """Coordinates of one exposure: half of the light in pairs mirrored about the centre, half single."""
    count = int(occupancy * side * side / 2 * rng.uniform(0.9, 1.1))
    here = rng.normal(side / 2, side / 5, (2, count))
    paired = rng.random(count) < 0.5
    there = rng.normal(side / 2, side / 5, (2, count))
    there[:, paired] = side - 1 - here[:, paired] + 1.5 * rng.normal(size=(2, int(paired.sum())))
    spots = np.rint(np.concatenate([here, there], axis=1)).astype(int)
    inside = ((spots >= 0) & (spots < side)).all(axis=0)
    return spots[:, inside]


def frames():
    """frames ITEMS SIDE OCCUPANCY: a camera with multiplication, dark level 100 +- 4, single photons 40 to a few hundred."""
    side, occupancy = int(rest[0]), float(rest[1])
    with open(f"{folder}/frames.u16", "wb") as out:
        for _ in range(items):
            image = 100 + np.rint(4 * rng.standard_normal((side, side), np.float32))
            x, y = photons(side, occupancy)
            np.add.at(image, (y, x), np.floor(rng.exponential(80, len(x))) + 40)
            out.write(np.clip(image, 0, 65535).astype("<u2").tobytes())


def counts():
    """counts ITEMS SIDE OCCUPANCY: a camera that counts photons; most pixels are zero."""
    side, occupancy = int(rest[0]), float(rest[1])
    with open(f"{folder}/frames.u16", "wb") as out:
        for _ in range(items):
            image = np.zeros((side, side), "<u2")
            x, y = photons(side, occupancy)
            image[y, x] = 1
            out.write(image.tobytes())


def bootstrap():
    """bootstrap RESAMPLES BLOCKS SIDE: block maps with a Gaussian peak on noise, and how often each block is drawn."""
    blocks, side = int(rest[0]), int(rest[1])
    y, x = np.mgrid[:side, :side]
    centre = side / 2
    peak = 40 * np.exp(-((x - centre + 0.7) ** 2) / (2 * 5.1**2) - (y - centre - 0.4) ** 2 / (2 * 6.2**2))
    save("maps.f64", peak + rng.normal(0, 10, (blocks, side, side)), "<f8")
    save("weights.u8", rng.multinomial(blocks, np.full(blocks, 1 / blocks), items), "u1")


def long_records():
    """long_records ITEMS near|far: two 16 x 16 arrays (channels 0..255, 256..511), 3.8 M clicks/s, the idler 20 ns late.

    u64, bit 63 rollover marker (2^40 ticks), 55..40 channel, 39..0 time. Half a second of clicks, again and again.
    """
    plane = rest[0]
    block, period = 1 << 21, 1 << 39
    half = block // 2
    pairs = half * 3 // 20
    start = np.sort(rng.integers(1_000_000, period - 1_000_000, half))
    x, y = rng.normal(7.5, 2.5, (2, half)), rng.normal(7.5, 2.5, (2, half))
    spread = rng.normal(0, 0.8, (2, half))
    sign = 1 if plane == "near" else -1
    paired = np.arange(half) % (half // pairs) == 0
    pixel = lambda u, v: np.clip(np.rint(v), 0, 15).astype(np.int64) * 16 + np.clip(np.rint(u), 0, 15).astype(np.int64)
    signal = pixel(x[0], y[0])
    u = np.where(paired, 7.5 + sign * (x[0] - 7.5) + spread[0], x[1])
    v = np.where(paired, 7.5 + sign * (y[0] - 7.5) + spread[1], y[1])
    late = np.where(paired, start + 20_000 + jitter(half, 300), rng.integers(1_000_000, period - 1_000_000, half))
    times = np.concatenate([start, late])
    channels = np.concatenate([signal, 256 + pixel(u, v)])
    order = np.argsort(times, kind="stable")
    first = (times[order] | (channels[order] << 40)).astype("<u8")
    second = ((times[order] + period) | (channels[order] << 40)).astype("<u8")
    marker = np.array([1 << 63], "<u8")
    written = 0
    with open(f"{folder}/{plane}.bin", "wb") as out:
        while written < items:
            for part in ([] if written == 0 else [marker]) + [first, second]:
                part = part[: items - written]
                part.tofile(out)
                written += len(part)


def long_frames():
    """long_frames ITEMS: 256 x 256 uint16 in HDF5, not packed; 64 frames of a camera, again and again."""
    import h5py

    side, some = 256, 64
    images = (100 + np.rint(4 * rng.standard_normal((some, side, side)))).astype(np.float64)
    for image in images:
        x, y = photons(side, 0.15)
        np.add.at(image, (y, x), np.floor(rng.exponential(80, len(x))) + 40)
    block = np.clip(images, 0, 65535).astype("<u2")
    with h5py.File(f"{folder}/frames.h5", "w") as out:
        stack = out.create_dataset("camera/frames", (items, side, side), "<u2")
        for at in range(0, items, some):
            stack[at : at + some] = block[: items - at]


globals()[kind]()
