"""Raw records to absolute times (int64) and channels, chunk by chunk so that temporaries stay in the cache.

decode.py FOLDER 8: u64, bit 63 rollover marker (2^48 ticks, gives no tag), 62..48 channel, 47..0 time.
decode.py FOLDER 4: u32, bit 31 special, 30..25 channel, 24..0 time; special with channel 63 rolls over `time` times 2^25.
"""
import sys

import numpy as np
from serve import serve

folder, width = sys.argv[1:3]
CHUNK = 32768
records = np.fromfile(f"{folder}/records.bin", "<u8" if width == "8" else "<u4")
times = np.empty(len(records), np.int64)
channels = np.empty(len(records), np.uint16 if width == "8" else np.uint8)


def decode_8(raw, offset):
    rollover = (raw >> np.uint64(63)).astype(bool)
    time = (raw & np.uint64((1 << 48) - 1)).astype(np.int64)
    channel = ((raw >> np.uint64(48)) & np.uint64(0x7FFF)).astype(np.uint16)
    if not rollover.any():
        time += offset
        return time, channel, offset
    time += offset + (np.cumsum(rollover, dtype=np.int64) << 48)
    keep = ~rollover
    return time[keep], channel[keep], offset + (int(rollover.sum()) << 48)


def decode_4(raw, offset):
    special = (raw >> np.uint32(31)).astype(bool)
    channel = ((raw >> np.uint32(25)) & np.uint32(63)).astype(np.uint8)
    time = (raw & np.uint32((1 << 25) - 1)).astype(np.int64)
    rollovers = np.cumsum(np.where(special & (channel == 63), time, 0))
    time += offset + (rollovers << 25)
    keep = ~special
    return time[keep], channel[keep], offset + (int(rollovers[-1]) << 25)


decode = decode_8 if width == "8" else decode_4


def work(items):
    offset = count = 0
    for start in range(0, items, CHUNK):
        time, channel, offset = decode(records[start : min(start + CHUNK, items)], offset)
        times[count : count + len(time)] = time
        channels[count : count + len(time)] = channel
        count += len(time)
    return count


def answer(count):
    some = slice(0, count, 997)
    return count, (times[some] % 1000003).sum(), channels[some].astype(np.int64).sum()


serve(work, answer)
