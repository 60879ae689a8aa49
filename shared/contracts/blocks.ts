/**
 * Blocks: what readers yield and accumulators take. Columns, never row objects. A block is to be used up before the next
 * is asked for: its columns may be views of memory that is used again (`ReaderEnvironment.records`).
 *
 * Precision policy. Time is whole ticks. A day at 1 ps is 8.64e16 ticks, past 2^53, so a block holds one 64-bit base and
 * whole-number differences in doubles (exact below 2^53). Whatever keeps times across blocks re-bases with
 * `rebaseTick` in `shared/units/ticks`. A tick is `tickFs` femtoseconds long.
 */
export interface TagBlock {
  kind: 'tags';
  /** Index, in the acquisition, of this block's first record (rollover markers and dropped records count). */
  firstRecord: number;
  /** Records of the file this block stands for, including those that yield no tag. */
  records: number;
  /** Absolute tick of `deltaTick = 0`, from the acquisition's own zero. */
  baseTick: bigint;
  /** Ticks after `baseTick`, whole numbers, in file order (not necessarily sorted); `count` of them are valid. */
  deltaTick: Float64Array;
  channel: Uint16Array;
  count: number;
  /** Bytes of the source this block used up, for progress. */
  bytes: number;
}

export type PixelArray =
  | Uint8Array
  | Int8Array
  | Uint16Array
  | Int16Array
  | Uint32Array
  | Int32Array
  | Float32Array
  | Float64Array;

export interface FrameBlock {
  kind: 'frames';
  firstFrame: number;
  count: number;
  width: number;
  height: number;
  /** `count * height * width` values, row-major (frame, y, x). */
  pixels: PixelArray;
  bytes: number;
}

export type Block = TagBlock | FrameBlock;
