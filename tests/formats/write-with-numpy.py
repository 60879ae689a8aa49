"""Arrays as NumPy writes them, into the folder named. Prints, as JSON, what each file holds and how it is to be read."""

import hashlib
import io
import json
import sys
import zipfile

import numpy as np

folder = sys.argv[1]
n = 4000
i = np.arange(n)
# Past 2^53, and over the sign bit of 64 bits.
late = (2**53 - 6000 + 3 * i + np.where(i > 2500, 2**58, 0)).astype("u8")
latest = (np.uint64(2**63 - 6000) + (5 * i).astype("u8")).astype("u8")
early = (7 * i).astype("i8") - 9000
small = (7 * i).astype("i8")
channel = ((i * 53) % 1024).astype("u2")
narrow = (channel % 100).astype("u1")
stack = ((np.arange(30 * 12 * 20) * 7919) % 250).reshape(30, 12, 20)
signed = stack - 125
said = {"tags": {}, "frames": {}}


def path(name):
    return f"{folder}/{name}"


def tags(name, time, channels, time_column, channel_column, proposed=True):
    text = "".join(f"{int(t)} {int(c)}\n" for t, c in zip(time, channels))
    said["tags"][name] = {
        "time": time_column,
        "channel": channel_column,
        "sha256": hashlib.sha256(text.encode()).hexdigest(),
        "records": len(time),
        "proposed": proposed,
    }


def frames(name, array, array_name=None):
    """What NumPy reads back: bytes of doubles, frame by frame."""
    shape = [size for size in array.shape]
    if len(shape) == 4:
        shape.remove(1)
    doubles = np.ascontiguousarray(array).astype("<f8")
    said["frames"][name] = {
        "array": array_name,
        "shape": shape,
        "sha256": hashlib.sha256(doubles.tobytes()).hexdigest(),
    }


def table(time, channels, dtype, **more):
    rows = np.zeros(n, dtype=np.dtype(dtype, **more))
    rows["when"], rows["where"] = time, channels
    return rows


both = ({"field": "when"}, {"field": "where"})
for name, dtype, more in [
    ("fields-packed.npy", [("when", "<u8"), ("where", "<u2")], {}),
    ("fields-aligned.npy", [("when", "<u8"), ("where", "u1")], {"align": True}),
    ("fields-big.npy", [("where", ">i4"), ("flag", "?"), ("when", ">u8")], {}),
    ("fields-mixed-order.npy", [("when", ">i8"), ("where", "<u2")], {}),
    ("fields-offsets.npy", {"names": ["when", "where"], "formats": ["<u8", "<u2"], "offsets": [4, 20], "itemsize": 27}, {}),
    ("fields-others.npy", [("note", "S3"), ("nested", [("a", "u1"), ("b", "<f4")]), ("when", "<u8"), ("xs", "<f4", (3,)), ("where", "<u2"), ("half", "<f2")], {}),
    ("fields-titles.npy", [(("a title", "when"), "<u8"), (("another", "where"), "<u2")], {}),
]:
    channels = narrow if "aligned" in name else channel
    np.save(path(name), table(late, channels, dtype, **more))
    tags(name, late, channels, *both)

for version in [(1, 0), (2, 0), (3, 0)]:
    name = f"version-{version[0]}.npy"
    names = ("zeit", "wo") if version[0] < 3 else ("zeit\u65f6", "\u00f6rt")
    rows = np.zeros(n, dtype=[(names[0], "<u8"), (names[1], "<u2")])
    rows[names[0]], rows[names[1]] = latest, channel
    with open(path(name), "wb") as f:
        np.lib.format.write_array(f, rows, version=version)
    tags(name, latest, channel, {"field": names[0]}, {"field": names[1]})

for order in "CF":
    for code in ["<i8", ">i8", "<u8", "<i4", ">u4", "<f8", ">f8", "<f4"]:
        name = f"table-{order}-{code[0] == '>'}-{code[1:]}.npy"
        time = {"i8": early, "u8": small, "i4": early, "u4": small, "f8": early, "f4": small}[code[1:]]
        rows = np.stack([channel.astype("i8"), time, np.zeros(n, "i8")], axis=1).astype(code)
        np.save(path(name), np.asarray(rows, order=order))
        tags(name, time, channel, {"field": 1}, {"field": 0})

for name, save in [("stored.npz", np.savez), ("deflated.npz", np.savez_compressed)]:
    save(path(name), photon_time=late, pixel=channel, gain=np.float32(3.5), note=np.array("a run"), dark=np.zeros(n))
    tags(name, late, channel, {"array": "photon_time"}, {"array": "pixel"})
save_rows = table(latest, channel, [("when", ">u8"), ("where", "<u2")])
np.savez_compressed(path("deflated-fields.npz"), events=save_rows)
tags("deflated-fields.npz", latest, channel, {"array": "events", "field": "when"}, {"array": "events", "field": "where"})
np.savez_compressed(path("deflated-fortran.npz"), events=np.asfortranarray(np.stack([early, channel.astype("i8")], axis=1)))
tags("deflated-fortran.npz", early, channel, {"array": "events", "field": 0}, {"array": "events", "field": 1})
np.savez(path("plain-names.npz"), early, narrow)
tags("plain-names.npz", early, narrow, {"array": "arr_0"}, {"array": "arr_1"})
np.savez(path("odd-names.npz"), **{"../a b/t\u00e9mps": early, "C:\\x": narrow})
tags("odd-names.npz", early, narrow, {"array": "../a b/t\u00e9mps"}, {"array": "C:\\x"})
for big in [np.int8, np.int16, np.int32, np.int64, np.uint8, np.uint16, np.uint32]:
    name = f"channels-{np.dtype(big).name}.npz"
    np.savez(path(name), t=small, c=narrow.astype(big))
    tags(name, small, narrow, {"array": "t"}, {"array": "c"})
np.savez(path("none.npz"), t=np.zeros(0, "u8"), c=np.zeros(0, "u2"))
tags("none.npz", [], [], {"array": "t"}, {"array": "c"}, proposed=False)


def npy(array):
    into = io.BytesIO()
    np.save(into, array)
    return into.getvalue()


# ZIP64 with sizes of 64 bits, written as to a pipe, and with bytes before the archive.
with zipfile.ZipFile(path("zip64.npz"), "w", zipfile.ZIP_DEFLATED) as archive:
    for name, array in [("t", late), ("c", channel)]:
        with archive.open(f"{name}.npy", "w", force_zip64=True) as member:
            member.write(npy(array))
tags("zip64.npz", late, channel, {"array": "t"}, {"array": "c"})


class Pipe(io.RawIOBase):
    def __init__(self, name):
        self.file = open(name, "wb")

    def writable(self):
        return True

    def write(self, data):
        return self.file.write(data)

    def close(self):
        self.file.close()


pipe = Pipe(path("piped.npz"))
with zipfile.ZipFile(pipe, "w", zipfile.ZIP_DEFLATED) as archive:
    archive.writestr("t.npy", npy(late))
    archive.writestr("c.npy", npy(channel))
    archive.comment = b"taken at night"
pipe.close()
tags("piped.npz", late, channel, {"array": "t"}, {"array": "c"})

for code in ["?", "i1", "u1", "<i2", ">i2", "<u2", ">u2", "<i4", ">i4", "<u4", ">u4", "<i8", ">i8", "<u8", ">u8", "<f2", ">f2", "<f4", ">f4", "<f8", ">f8"]:
    kind = code[-2] if len(code) > 1 else "u"
    array = (signed if kind in "if" else stack).astype(code)
    for order in "CF":
        name = f"frames-{order}-{'big' if code[0] == '>' else 'little'}-{'bool' if code == '?' else code[-2:]}.npy"
        np.save(path(name), np.asarray(array, order=order))
        frames(name, array)
for name, array in [("frames-channel.npy", stack[:, None]), ("frames-colour.npy", stack[..., None]), ("frames-run.npy", stack[None])]:
    np.save(path(name), array.astype("<u2"))
    frames(name, array)
for name, save in [("frames.npz", np.savez), ("frames-deflated.npz", np.savez_compressed)]:
    save(path(name), shots=stack.astype(">u2"), dark=stack[0].astype("u2"), t=early)
    frames(name, stack, "shots")
np.savez_compressed(path("frames-deflated-fortran.npz"), shots=np.asfortranarray(stack.astype("<f4")))
frames("frames-deflated-fortran.npz", stack, "shots")

# What must be refused.
np.save(path("objects.npy"), np.array([{"a": 1}, None], dtype=object), allow_pickle=True)
np.savez(path("objects.npz"), o=np.array([[1], 2], dtype=object), t=early, c=narrow)
np.save(path("fractions.npy"), np.stack([i / 3, i % 7], axis=1))
np.save(path("late-fraction.npy"), np.stack([np.where(i == 3900, 0.5, i), i % 7], axis=1))
np.save(path("lost-ticks.npy"), np.stack([late.astype("f8"), i % 7], axis=1))
np.save(path("complex.npy"), stack.astype("c8"))
np.save(path("dates.npy"), np.arange(50).astype("M8[ns]"))
np.save(path("single.npy"), np.float64(3))
np.save(path("plane.npy"), stack[0])
np.save(path("no-frames.npy"), np.zeros((0, 4, 5), "u2"))
np.save(path("minus.npy"), np.stack([i, np.where(i == 1234, -1, i % 9)], axis=1))
np.savez(path("unequal.npz"), t=early, c=narrow[:9])
np.savez(path("empty.npz"))
with open(path("two-arrays.npy"), "wb") as f:
    np.save(f, np.stack([early, narrow.astype("i8")], axis=1))
    np.save(f, narrow)
with zipfile.ZipFile(path("bzip2.npz"), "w", zipfile.ZIP_BZIP2) as archive:
    archive.writestr("t.npy", npy(early))
with zipfile.ZipFile(path("texts.zip"), "w") as archive:
    archive.writestr("notes.txt", "nothing")


def forge(name, members, lies):
    """An archive whose directory claims other sizes of members than they have."""
    into = io.BytesIO()
    with zipfile.ZipFile(into, "w", zipfile.ZIP_DEFLATED) as archive:
        for member, data in members.items():
            archive.writestr(member, data)
    data = bytearray(into.getvalue())
    for member, (field, size) in lies.items():
        at = data.rfind(member.encode()) - 46
        assert data[at : at + 4] == b"PK\x01\x02"
        data[at + field : at + field + 4] = size.to_bytes(4, "little")
    with open(path(name), "wb") as f:
        f.write(data)


few = npy(np.arange(25, dtype="u8"))
unpacked = 24
packed = 20
checksum = 16
forge("bomb.npz", {"t.npy": few + bytes(2 * 10**8), "c.npy": few}, {"t.npy": (unpacked, len(few))})
forge("claims.npz", {"t.npy": few, "c.npy": few}, {"t.npy": (unpacked, 4 * 10**9)})
forge("beyond.npz", {"t.npy": few, "c.npy": few}, {"c.npy": (packed, 10**6)})
forge("checksum.npz", {"t.npy": few, "c.npy": few}, {"t.npy": (checksum, 12345)})
# The same length, so that the header stays as long as it says.
trillion = few.replace(b"'shape': (25,), }           ", b"'shape': (1000000000000,), }")
assert len(trillion) == len(few) and trillion != few
with open(path("trillion.npy"), "wb") as f:
    f.write(trillion)
forge("trillion.npz", {"t.npy": trillion, "c.npy": trillion}, {})
print(json.dumps(said))
