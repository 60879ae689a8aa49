import type { RecordDecoder, RecordDecoding, RecordRules, RecordState } from '../../shared/contracts/reader';
import type { DecodeRecords, TagWasm } from './tag-wasm';

/** Records a call: bytes and columns together fit the second-level cache. */
const CAPACITY = 2 ** 14;
const RULES_BYTES = 176;
const MOST_ODD = 6;
const modes = { none: 0, wrap: 1, marker: 2, counted: 3 } as const;

/**
 * Compiled decoding of fixed-width records (see wasm/tags-decode.ts; the readable twins are beside the records format).
 * One reading at a time. The columns are views of the module's memory, where the accumulator takes them without a copy.
 * Memory: 18 to 24 bytes a record of one call.
 */
export function createRecordDecoding(wasm: TagWasm): RecordDecoding {
  const rulesAt = wasm.place(RULES_BYTES);
  // The kernel reads up to 8 bytes past the last record.
  const sourceAt = wasm.place(8 * CAPACITY + 8);
  const timeAt = wasm.place(8 * CAPACITY);
  const channelAt = wasm.place(2 * CAPACITY);
  let isTaken = false;
  return {
    open(rules): RecordDecoder | null {
      if (isTaken || rules.odd.length > MOST_ODD) return null;
      isTaken = true;
      let isOpen = true;
      const { recordBytes } = rules;
      writeRules(wasm, rulesAt, rules);
      const decode = decoderOf(wasm, rules);
      return {
        capacity: CAPACITY,
        decode(bytes: Uint8Array, state: RecordState) {
          wasm.u8(sourceAt, bytes.length).set(bytes);
          wasm.f64(rulesAt + 48, 2).set([state.epochTick, state.previousTick]);
          const records = bytes.length / recordBytes;
          const count = decode(rulesAt, sourceAt, records, timeAt, channelAt);
          const [epochTick = 0, previousTick = -1] = wasm.f64(rulesAt + 48, 2);
          state.epochTick = epochTick;
          state.previousTick = previousTick;
          return {
            records: wasm.i32(rulesAt + 64, 1)[0]!,
            deltaTick: wasm.f64(timeAt, count),
            channel: wasm.u16(channelAt, count),
          };
        },
        close() {
          if (isOpen) isTaken = false;
          isOpen = false;
        },
      };
    },
  };
}

/** The quickest loop that takes such records. */
function decoderOf({ call }: TagWasm, { recordBytes, bigEndian, channel, odd }: RecordRules): DecodeRecords {
  if (recordBytes === 4) return bigEndian ? call.decodeFourBig : call.decodeFour;
  if (recordBytes !== 8) return (...places) => call.decodeAny(...places, recordBytes, bigEndian ? 1 : 0);
  if (bigEndian) return call.decodeEightBig;
  const isHigh = channel.firstBit >= 32 && odd.every(({ mask }) => (mask & 0xffffffffn) === 0n);
  return isHigh ? call.decodeEightHigh : call.decodeEight;
}

/** Byte offsets as in wasm/tags-decode.ts. */
function writeRules(wasm: TagWasm, at: number, rules: RecordRules): void {
  const view = new DataView(wasm.memory.buffer, at, RULES_BYTES);
  const { time, channel, odd } = rules;
  const maskOf = (bits: number): bigint => (1n << BigInt(bits)) - 1n;
  view.setBigUint64(0, BigInt(time.firstBit), true);
  view.setBigUint64(8, maskOf(time.bits), true);
  view.setBigUint64(16, BigInt(channel.firstBit), true);
  view.setBigUint64(24, maskOf(channel.bits), true);
  view.setFloat64(32, rules.advanceTick, true);
  view.setInt32(40, modes[rules.rollover], true);
  view.setInt32(44, odd.length, true);
  // What no record passes, for the kernel that always makes the first test.
  const tests = odd.length > 0 ? odd : [{ mask: 0n, value: 1n }];
  tests.forEach(({ mask, value }, k) => {
    view.setBigUint64(80 + 16 * k, mask, true);
    view.setBigUint64(88 + 16 * k, value, true);
  });
}
