import type { Block, TagBlock } from '../../shared/contracts/blocks';
import type { Layout } from '../../shared/contracts/layout';
import type { CancelToken, Reader, ReaderFacts, ReadRange } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';
import { assertRange } from './ranges';

export interface SequenceFile {
  name: string;
  reader: Reader;
}

interface PlacedFile extends SequenceFile {
  /** Its first record or frame in the acquisition. */
  start: number;
  length: number;
  /** First and last tag as its own times say, rollovers inside it left out; null without tags. */
  border: { firstTick: bigint; lastTick: bigint } | null;
}

/** Tags may come so much late in a file, so a next file may begin so much before the end of the one before it. */
const disorderFs = 5e12;
const never = { cancelled: false };

/**
 * One acquisition in several files of one layout, in the order given: a reader made of readers. Records and frames are
 * numbered through. Counters that roll over go on from file to file, also across the border; absolute times must go on
 * by themselves. Ranges may span files: each file is read by its own reader.
 * @throws Problem `wrong-type` where a file differs in kind, size or type, `out-of-order` where absolute times do not
 * follow each other; both name the file.
 */
export async function openSequence(files: readonly SequenceFile[], layout: Layout): Promise<Reader> {
  const facts = joinFacts(files);
  const rolls = layout.format === 'records' && layout.rollover.in !== 'none';
  const wrapTick =
    layout.format === 'records' && layout.rollover.in === 'wrap' ? 1n << BigInt(layout.time.bits) : null;
  const placed: PlacedFile[] = [];
  let total = 0;
  for (const file of files) {
    const length = lengthOf(file.reader.facts);
    const border =
      facts.kind === 'tags' && (!rolls || wrapTick !== null) ? await bordersOf(file.reader, length) : null;
    placed.push({ ...file, start: total, length, border });
    total += length;
  }
  if (facts.kind === 'tags' && !rolls) assertFollowing(placed, BigInt(Math.ceil(disorderFs / facts.tickFs)));
  const name = files[0]!.name;
  const inside = (range: ReadRange): ReadRange =>
    assertRange(range, total, facts.kind === 'tags' ? 'records' : 'frames', name);
  /** The rollover that a time field makes between a file and the next one with tags. */
  const wrapAfter = (file: PlacedFile): bigint => {
    const next = placed.slice(placed.indexOf(file) + 1).find((each) => each.border !== null);
    return wrapTick !== null && wrapsBetween(file, next, wrapTick) ? wrapTick : 0n;
  };
  const wholes = new Map<PlacedFile, bigint>();
  /** Rollovers from record `start` of a file to where the next file begins. */
  const restOf = async (file: PlacedFile, own: bigint, token: CancelToken): Promise<bigint> => {
    const whole = wholes.get(file) ?? (await file.reader.tickOffsetAt(file.length, token));
    wholes.set(file, whole);
    return whole - own + wrapAfter(file);
  };
  // What was found of the last range asked about, which is mostly read next.
  let asked: { start: number; own: bigint } | null = null;
  let advanced: { range: ReadRange; parts: bigint[] } | null = null;

  return {
    facts,
    async tickOffsetAt(start, token, onBytes) {
      inside({ start, end: total });
      let offset = 0n;
      for (const file of placed) {
        if (start < file.start + file.length) {
          const own = await file.reader.tickOffsetAt(start - file.start, token, onBytes);
          asked = { start, own };
          return offset + own;
        }
        offset += await restOf(file, 0n, token);
      }
      return offset;
    },
    ...(rolls
      ? {
          advanceOf: async (range, token) => {
            const parts: bigint[] = [];
            for (const { file, part } of partsOf(inside(range), placed)) {
              const within = (await file.reader.advanceOf?.(part, token)) ?? 0n;
              parts.push(within + (part.end === file.length ? wrapAfter(file) : 0n));
            }
            advanced = { range, parts };
            return parts.reduce((sum, each) => sum + each, 0n);
          },
        }
      : {}),
    async *read(range, tickOffset, token) {
      inside(range);
      const known =
        advanced?.range.start === range.start && advanced.range.end === range.end ? advanced : null;
      let offset = tickOffset;
      for (const [k, { file, part }] of partsOf(range, placed).entries()) {
        const isCut = range.end > file.start + file.length;
        // Readers that know where they are need not look again; those of absolute times always answer 0n.
        const isKnown = asked !== null && asked.start === range.start && k === 0;
        const own = isKnown
          ? asked!.own
          : isCut && known === null
            ? await file.reader.tickOffsetAt(part.start, token)
            : 0n;
        for await (const block of file.reader.read(part, own, token)) {
          yield shifted(block, file.start, offset - own);
        }
        if (isCut) offset += known?.parts[k] ?? (await restOf(file, own, token));
      }
    },
    async close() {
      for (const file of placed) await file.reader.close();
    },
  };
}

function partsOf(range: ReadRange, files: readonly PlacedFile[]): { file: PlacedFile; part: ReadRange }[] {
  return files.flatMap((file) => {
    const part = partOf(range, file);
    return part === null ? [] : [{ file, part }];
  });
}

const lengthOf = (facts: ReaderFacts): number => (facts.kind === 'tags' ? facts.records : facts.frames);

/** What of the range lies in the file, counted from its start. */
function partOf(range: ReadRange, { start, length }: PlacedFile): ReadRange | null {
  const from = Math.max(0, range.start - start);
  const to = Math.min(length, range.end - start);
  return from < to ? { start: from, end: to } : null;
}

function shifted(block: Block, start: number, tick: bigint): Block {
  return block.kind === 'tags'
    ? { ...block, firstRecord: block.firstRecord + start, baseTick: block.baseTick + tick }
    : { ...block, firstFrame: block.firstFrame + start };
}

function joinFacts(files: readonly SequenceFile[]): ReaderFacts {
  const first = files[0]!.reader.facts;
  let length = 0;
  for (const { name, reader } of files) {
    const difference = differenceOf(first, reader.facts);
    if (difference !== null) {
      throw new Problem(
        'wrong-type',
        `Expected ${difference.expected} in ${name}, as in ${files[0]!.name}, found ${difference.found}; the files of one acquisition must be alike, leave this one out.`,
        name,
      );
    }
    length += lengthOf(reader.facts);
  }
  return first.kind === 'tags' ? { ...first, records: length } : { ...first, frames: length };
}

function differenceOf(a: ReaderFacts, b: ReaderFacts): { expected: string; found: string } | null {
  const [expected, found] = [describe(a), describe(b)];
  return expected === found ? null : { expected, found };
}

function describe(facts: ReaderFacts): string {
  return facts.kind === 'tags'
    ? `tags of ${facts.tickFs} fs a tick`
    : `frames of ${facts.width} x ${facts.height} pixels of ${facts.type}`;
}

/** A wrap lies between two files as between two records: where the time field falls by more than half its range. */
function wrapsBetween(file: PlacedFile, next: PlacedFile | undefined, wrapTick: bigint): boolean {
  if (file.border === null || next?.border == null) return false;
  return (file.border.lastTick % wrapTick) - (next.border.firstTick % wrapTick) > wrapTick / 2n;
}

/** First and last tag of a file. Looks further in only while it finds records without tags. */
async function bordersOf(reader: Reader, length: number): Promise<PlacedFile['border']> {
  let first: bigint | null = null;
  for (let start = 0, size = 64; start < length && first === null; start += size, size *= 4) {
    first = (await tagsIn(reader, { start, end: Math.min(length, start + size) }))?.firstTick ?? null;
  }
  if (first === null) return null;
  for (let end = length, size = 64; end > 0; end -= size, size *= 4) {
    const last = await tagsIn(reader, { start: Math.max(0, end - size), end });
    if (last !== null) return { firstTick: first, lastTick: last.lastTick };
  }
  return null;
}

async function tagsIn(
  reader: Reader,
  range: ReadRange,
): Promise<{ firstTick: bigint; lastTick: bigint } | null> {
  const ends: bigint[] = [];
  for await (const block of reader.read(range, 0n, never)) {
    if (block.kind !== 'tags' || block.count === 0) continue;
    ends[0] ??= tickAt(block, 0);
    ends[1] = tickAt(block, block.count - 1);
  }
  const [firstTick, lastTick] = ends;
  return firstTick === undefined || lastTick === undefined ? null : { firstTick, lastTick };
}

const tickAt = (block: TagBlock, at: number): bigint => block.baseTick + BigInt(block.deltaTick[at]!);

type Bordered = PlacedFile & { border: NonNullable<PlacedFile['border']> };

function assertFollowing(files: readonly PlacedFile[], disorderTick: bigint): void {
  const withTags = files.filter((file): file is Bordered => file.border !== null);
  const wrong = firstWrong(withTags, disorderTick);
  if (wrong === null) return;
  const { before, file } = wrong;
  const sorted = withTags.toSorted((a, b) => (a.border.firstTick < b.border.firstTick ? -1 : 1));
  const wayOut =
    firstWrong(sorted, disorderTick) === null
      ? `give them in the order ${sorted.map((each) => each.name).join(', ')}`
      : 'no order of them does: choose the files of one acquisition, or read them one by one';
  throw new Problem(
    'out-of-order',
    `Expected ${file.name} to begin where ${before.name} ends, at tick ${before.border.lastTick}, found that it begins at tick ${file.border.firstTick}: the files do not follow each other; ${wayOut}.`,
    file.name,
  );
}

function firstWrong(
  files: readonly Bordered[],
  disorderTick: bigint,
): { before: Bordered; file: Bordered } | null {
  for (let k = 1; k < files.length; k += 1) {
    const [before, file] = [files[k - 1]!, files[k]!];
    if (file.border.firstTick < before.border.lastTick - disorderTick) return { before, file };
  }
  return null;
}
