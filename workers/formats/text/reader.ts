import type { TagBlock } from '../../../shared/contracts/blocks';
import type { TextLayout } from '../../../shared/contracts/layout';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { assertRange } from '../ranges';
import { passTurn } from '../turn';
import { findLine, indexLines, readWhole, shrunk } from './line-index';
import { parseFast, type TextBase, type TextSink } from './parse-fast';
import { baseOfLine, parseLine } from './parse-line';
import { planText, type TextPlan } from './plan';

/** Bytes read at once, and so the longest line that can be read. */
const sliceBytes = 2 ** 22;
/** Lines a block: 2.5 MiB of columns. */
const mostLines = 2 ** 18;
const LF = 10;
const CR = 13;
const bom = [0xef, 0xbb, 0xbf];

/**
 * Tags of a text, one a line. A record is a line after the header; blank ones and remarks are records without a tag, so
 * that line numbers and ranges need no parsing. Memory is bounded by a slice and a block, whatever the file.
 */
export async function openText(source: ByteSource, layout: TextLayout): Promise<Reader> {
  const plan = planText(layout);
  const index = await indexLines(source, { cancelled: false });
  const records = Math.max(0, index.lines - plan.headerLines);
  // Ranges are mostly asked for in rising order: each starts where one before it ended.
  let known = { line: 0, byte: 0 };
  return {
    facts: { kind: 'tags', records, tickFs: layout.tickFs, reader: 'text' },
    tickOffsetAt: async () => 0n,
    async *read(range, tickOffset, token) {
      assertRange(range, records, 'lines', source.name);
      const first = plan.headerLines + range.start;
      const byte = known.line === first ? known.byte : await findLine(source, index, first);
      const end = yield* readLines(source, plan, range, byte, tickOffset, token);
      known = { line: plan.headerLines + range.end, byte: end };
    },
    close: () => source.close(),
  };
}

/** Blocks of the lines [start, end), whose first begins at `byte`; answers where the one after them begins. */
async function* readLines(
  source: ByteSource,
  plan: TextPlan,
  range: ReadRange,
  byte: number,
  tickOffset: bigint,
  token: CancelToken,
): AsyncGenerator<TagBlock, number> {
  let from = byte;
  let next = range.start;
  while (next < range.end) {
    await passTurn(token);
    const bytes = await readWhole(source, from, Math.min(source.size, from + sliceBytes));
    if (bytes.length === 0) throw shrunk(source, from);
    const isFileEnd = from + bytes.length === source.size;
    const ended = endOfLines(bytes, isFileEnd);
    // The last line of a file may lack its end.
    const lines = isFileEnd ? bytes.length : ended;
    if (lines === 0) throw tooLong(source.name, plan.headerLines + next + 1);
    for (let at = from === 0 ? bomLength(bytes) : 0; at < lines; ) {
      const block = readBlock(bytes, at, { ended, lines }, plan, next, range.end, source.name);
      yield {
        kind: 'tags',
        firstRecord: next,
        records: block.sink.lines,
        baseTick: block.base.tick + tickOffset,
        deltaTick: block.sink.deltaTick,
        channel: block.sink.channel,
        count: block.sink.count,
        bytes: block.end - at,
      };
      next += block.sink.lines;
      at = block.end;
      if (next === range.end) return from + at;
    }
    from += lines;
  }
  return from;
}

const nowhere: TextBase = { tick: 0n, tickNumber: 0, high: 0, low: 0 };

/** One block from `from` on: until the lines of the slice or of the range end, the block is full, or its base is too far. */
function readBlock(
  bytes: Uint8Array,
  from: number,
  { ended, lines }: { ended: number; lines: number },
  plan: TextPlan,
  firstRecord: number,
  endRecord: number,
  name: string,
): { base: TextBase; sink: TextSink; end: number } {
  const length = Math.min(mostLines, endRecord - firstRecord);
  const sink = { deltaTick: new Float64Array(length), channel: new Uint16Array(length), count: 0, lines: 0 };
  let base: TextBase | null = null;
  let at = from;
  while (at < lines && sink.lines < length) {
    if (base !== null && at < ended) at = parseFast(bytes, at, ended, plan, base, sink);
    if (at >= lines || sink.lines >= length) break;
    const end = endOfLine(bytes, at, lines);
    const place = { name, line: plan.headerLines + firstRecord + sink.lines + 1 };
    base ??= baseOfLine(bytes, at, end, plan, place);
    if (!parseLine(bytes, at, end, plan, base ?? nowhere, sink, place)) break;
    at = bytes[end] === CR && bytes[end + 1] === LF ? end + 2 : end + 1;
  }
  return { base: base ?? nowhere, sink, end: Math.min(at, lines) };
}

function endOfLine(bytes: Uint8Array, from: number, to: number): number {
  let at = from;
  while (at < to && bytes[at] !== LF && bytes[at] !== CR) at += 1;
  return at;
}

/** Right after the last line end. A CR as the very last byte may be half of one, unless the file ends there. */
function endOfLines(bytes: Uint8Array, isFileEnd: boolean): number {
  let at = bytes.length;
  if (!isFileEnd && bytes[at - 1] === CR) at -= 1;
  while (at > 0 && bytes[at - 1] !== LF && bytes[at - 1] !== CR) at -= 1;
  return at;
}

function bomLength(bytes: Uint8Array): number {
  return bom.every((byte, i) => bytes[i] === byte) ? bom.length : 0;
}

function tooLong(name: string, line: number): Problem {
  return new Problem(
    'not-this-format',
    `Expected lines of at most ${sliceBytes} bytes in ${name}, found none ending so soon from line ${line} on; choose a text with one tag a line.`,
    `${name}, line ${line}`,
  );
}
