"""Stacks as tifffile and libtiff (by Pillow) write them, into the folder named. Prints, as JSON, what each file holds."""

import hashlib
import json
import struct
import sys

import numpy as np
import tifffile
from PIL import Image

folder = sys.argv[1]
frames, height, width = 12, 37, 50
stack = ((np.arange(frames * height * width) * 7919) % 250).reshape(frames, height, width)
# Long runs, so that tables of codes fill and are cleared.
wide = np.cumsum(((np.arange(3 * 300 * 256) * 2654435761) % 977 < 40), dtype="i8").reshape(3, 300, 256) % 60000
said = {}


def path(name):
    return f"{folder}/{name}"


def hold(name, array):
    doubles = np.ascontiguousarray(array).astype("<f8")
    said[name] = {"shape": list(array.shape), "sha256": hashlib.sha256(doubles.tobytes()).hexdigest()}


def write(name, array, **options):
    """By tifffile, which must read back what was meant."""
    options.setdefault("photometric", "minisblack")
    tifffile.imwrite(path(name), array, **options)
    assert np.array_equal(tifffile.imread(path(name)).reshape(array.shape), array), name
    hold(name, array)


def apart(name, pages, **options):
    """Page after page, each directory before its pixels."""
    with tifffile.TiffWriter(path(name), **options) as tif:
        for page in pages:
            tif.write(page, contiguous=False, photometric="minisblack", metadata=None)
    hold(name, pages)


codes = ["u1", "i1", "u2", "i2", "u4", "i4", "u8", "i8", "f2", "f4", "f8"]
for code in codes:
    array = (stack if code[0] == "u" else stack - 125).astype(code)
    for order, byteorder in [("little", "<"), ("big", ">")]:
        for big in [False, True]:
            kind = "bigtiff" if big else "classic"
            write(f"{code}-{order}-{kind}.tif", array, byteorder=byteorder, bigtiff=big)
        write(f"{code}-{order}-deflate.tif", array, byteorder=byteorder, compression="zlib")
        if code not in ("f2",):
            write(f"{code}-{order}-tiles.tif", array, byteorder=byteorder, tile=(16, 32))
        if code[0] != "f" and code[1] != "8":
            write(f"{code}-{order}-predictor2.tif", array, byteorder=byteorder, compression="zlib", predictor=True)
            write(
                f"{code}-{order}-tiles-predictor2.tif",
                array,
                byteorder=byteorder,
                compression="zlib",
                predictor=True,
                tile=(32, 16),
            )
for rows in [1, 7, 36, 37, 100]:
    write(f"strips-of-{rows}.tif", stack.astype("u2"), rowsperstrip=rows)
    write(f"strips-of-{rows}-deflate.tif", stack.astype("u2"), rowsperstrip=rows, compression="zlib", bigtiff=True)
write("old-deflate.tif", stack.astype("u2"), compression=32946)
write("one-page.tif", stack[0].astype("u2")[None])
for big in [False, True]:
    apart(f"apart-{big}.tif", stack.astype("u2"), bigtiff=big)
    apart(f"apart-{big}-msb.tif", stack.astype("f4"), bigtiff=big, byteorder=">")
apart("apart-many.tif", np.tile(stack[:, :3, :4], (40, 1, 1)).astype("u1"))
# One directory, all frames behind it.
write("described.tif", stack.astype("u2"), truncate=True)
write("described-images.tif", stack.astype("u2"), imagej=True, truncate=True)
write("described-images-pages.tif", stack.astype("u1"), imagej=True)


def by_libtiff(name, array, compression, predictor=1):
    pages = [Image.fromarray(page) for page in array]
    pages[0].save(path(name), save_all=True, append_images=pages[1:], compression=compression, tiffinfo={317: predictor})
    hold(name, array)


for data, title in [(stack, "small"), (wide, "wide")]:
    for code in ["u1", "u2", "i4", "f4"]:
        array = (data % 250 if code == "u1" else data).astype(code)
        for compression in ["tiff_lzw", "tiff_deflate", "packbits", "raw"]:
            predictors = [1] if compression in ("packbits", "raw") else [1, 2, 3] if code == "f4" else [1, 2]
            for predictor in predictors:
                by_libtiff(f"libtiff-{title}-{code}-{compression}-{predictor}.tif", array, compression, predictor)
noise = np.random.default_rng(3).integers(0, 65536, (4, 120, 130))
by_libtiff("libtiff-noise-lzw.tif", noise.astype("u2"), "tiff_lzw")
by_libtiff("libtiff-flat-lzw.tif", np.zeros((2, 700, 700), "u2"), "tiff_lzw")
by_libtiff("libtiff-noise-lzw-2.tif", noise.astype("u2"), "tiff_lzw", 2)


def repack(name, array, source, compression):
    """Big-endian pages around parts that libtiff packed: it compresses bytes, whatever their order."""
    swapped = array.astype(">u2")
    by_libtiff(source, swapped.view("u1").reshape(*array.shape[:2], -1), compression)
    del said[source]
    with tifffile.TiffFile(path(source)) as tif:
        packed = []
        for page in tif.pages:
            assert len(page.dataoffsets) == 1
            tif.filehandle.seek(page.dataoffsets[0])
            packed.append(tif.filehandle.read(page.databytecounts[0]))
        code = tif.pages[0].compression
    # By hand: no writer at hand makes big-endian LZW.
    into = bytearray(b"MM\x00\x2a" + struct.pack(">L", 8))
    for k, part in enumerate(packed):
        size = 2 + 9 * 12 + 4
        values = [
            (256, 4, array.shape[2]),
            (257, 4, array.shape[1]),
            (258, 3, 16),
            (259, 3, code),
            (262, 3, 1),
            (273, 4, len(into) + size),
            (277, 3, 1),
            (278, 4, array.shape[1]),
            (279, 4, len(part)),
        ]
        into += struct.pack(">H", len(values))
        for tag, kind, value in values:
            into += struct.pack(">HHL", tag, kind, 1) + (struct.pack(">L", value) if kind == 4 else struct.pack(">HH", value, 0))
        last = k == len(packed) - 1
        into += struct.pack(">L", 0 if last else len(into) + 4 + len(part)) + part
    with open(path(name), "wb") as f:
        f.write(into)
    hold(name, array)


repack("lzw-big.tif", stack.astype("u2"), "packed-lzw.tif", "tiff_lzw")
repack("packbits-big.tif", stack.astype("u2"), "packed-bits.tif", "packbits")

# What must be refused.
tifffile.imwrite(path("colours.tif"), np.zeros((2, 8, 9, 3), "u1"), photometric="rgb")
tifffile.imwrite(path("white-is-zero.tif"), stack.astype("u2"), photometric="miniswhite")
tifffile.imwrite(path("palette.tif"), stack.astype("u1"), photometric="palette", colormap=np.zeros((3, 256), "u2"))
tifffile.imwrite(path("complex.tif"), stack.astype("c8"), photometric="minisblack")
tifffile.imwrite(path("two-bits.tif"), np.zeros((2, 8, 8), "bool"), photometric="minisblack")
with tifffile.TiffWriter(path("sizes.tif")) as tif:
    for page in [stack[0], stack[1], stack[2][:30]]:
        tif.write(page.astype("u2"), contiguous=False, photometric="minisblack", metadata=None)
with tifffile.TiffWriter(path("types.tif")) as tif:
    for page in [stack[0].astype("u2"), stack[1].astype("u2"), stack[2].astype("i2")]:
        tif.write(page, contiguous=False, photometric="minisblack", metadata=None)
Image.fromarray(stack[0].astype("u1")).save(path("jpeg.tif"), compression="jpeg")
tifffile.imwrite(path("turned.tif"), stack.astype("u2"), photometric="minisblack", extratags=[(274, "H", 1, 6, True)])
print(json.dumps(said))
