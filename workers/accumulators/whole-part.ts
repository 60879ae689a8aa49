import type {
  ArmSpec,
  ArmTally,
  FrameSpec,
  PairTally,
  TagSpec,
  TagTally,
  TallySpec,
} from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { z } from '../../shared/util/zod';
import type { Part } from './accumulator';
import { blockWindow, type FramePart, frameKey, jointLength, jointPixels } from './frame-part';
import { MATRIX_LIMIT } from './pair-store';
import { SliceGrid } from './slice-grid';
import type { TagPart } from './tag-part';

/**
 * A part that comes from outside (a file) must be whole before it is merged: the loops trust lengths and indices, and
 * numbers that are none would spread into every sum.
 * @throws Problem `newer-version` or `unreadable` naming the member that does not fit.
 */
export function assertWholePart(spec: TallySpec, part: unknown): asserts part is Part {
  const version = typeof part === 'object' && part !== null && 'part' in part ? part.part : undefined;
  const latest = spec.kind === 'tags' ? 1 : 2;
  if (typeof version === 'number' && version > latest) {
    throw new Problem(
      'newer-version',
      `Counts of version ${latest} were expected, version ${version} was found; combine with the engine that wrote them.`,
    );
  }
  const schema = spec.kind === 'tags' ? tagPartSchema(spec, gridOf(spec, part)) : framePartSchema(spec);
  const parsed = schema.safeParse(part);
  if (parsed.success) return;
  const [issue] = parsed.error.issues;
  throw new Problem(
    'unreadable',
    `The counts are not whole at ${issue?.path.join('.') ?? ''}: ${issue?.message ?? 'unknown'}; count this shard again.`,
  );
}

const count = z.number().min(0);

function doubles(length: number) {
  return z
    .instanceof(Float64Array)
    .refine((array) => array.length === length, `${length} numbers were expected`)
    .refine(allFinite, 'a finite number was expected everywhere');
}

function singles(length: number) {
  return z
    .instanceof(Float32Array)
    .refine((array) => array.length === length, `${length} numbers were expected`)
    .refine(allFinite, 'a finite number was expected everywhere');
}

function bytes(length: number) {
  return z.instanceof(Uint8Array).refine((array) => array.length === length, `${length} bytes were expected`);
}

function allFinite(array: Float64Array | Float32Array): boolean {
  // Nothing times a number is nothing, times anything else NaN: no branch for each of millions.
  let nothing = 0;
  for (let i = 0; i < array.length; i++) nothing += 0 * array[i]!;
  return nothing === 0;
}

/** The slices that the ticks of a part need, or longer ones where it says so: they decide the lengths of most arrays. */
function gridOf(spec: TagSpec, part: unknown): SliceGrid {
  const tick = z.bigint().nullable();
  const read = z
    .looseObject({ tally: z.looseObject({ firstTick: tick, lastTick: tick, sliceTick: z.int().min(1) }) })
    .safeParse(part);
  if (!read.success) return new SliceGrid(spec.tickFs);
  const { firstTick, lastTick, sliceTick } = read.data.tally;
  const grid = new SliceGrid(spec.tickFs, Math.floor(Math.log2(sliceTick)));
  if (firstTick !== null && lastTick !== null && lastTick >= firstTick) grid.cover(firstTick, lastTick);
  return grid;
}

function tagPartSchema(spec: TagSpec, grid: SliceGrid): z.ZodType<TagPart> {
  const slices = grid.count;
  const pixelsA = spec.a.width * spec.a.height;
  const pixelsB = spec.b.width * spec.b.height;
  const border = z
    .strictObject({
      refTick: z.bigint(),
      markTick: z.union([z.number(), z.literal(Number.NEGATIVE_INFINITY)]),
      time: z.instanceof(Float64Array).refine(allFinite, 'finite times were expected'),
      site: z
        .instanceof(Int32Array)
        .refine(
          (sites) => sites.every((site) => site >= 0 && site < pixelsA + pixelsB),
          'sites of the detector map were expected',
        ),
    })
    .refine(({ time, site }) => time.length === site.length, 'as many times as sites were expected');
  const arm = ({ width, height }: ArmSpec): z.ZodType<ArmTally> =>
    z.strictObject({
      width: z.literal(width),
      height: z.literal(height),
      singles: doubles(width * height),
      singlesPerSlice: doubles(slices),
      masked: bytes(width * height),
    });
  const { a, b } = spec;
  const one = spec.window === null ? 0 : 1;
  const lags = one * (a.width + b.width - 1) * (a.height + b.height - 1);
  const hasMatrix = one === 1 && pixelsA * pixelsB <= MATRIX_LIMIT;
  const pairs: z.ZodType<PairTally> = z.strictObject({
    pairs: doubles(slices),
    jointX: doubles(one * slices * a.width * b.width),
    jointY: doubles(one * slices * a.height * b.height),
    imageB: doubles(one * slices * pixelsB),
    imageA: doubles(one * slices * pixelsA),
    difference: doubles(lags),
    sum: doubles(lags),
    matrix: hasMatrix ? doubles(pixelsA * pixelsB) : z.null(),
  });
  const tally: z.ZodType<TagTally> = z.strictObject({
    kind: z.literal('tags'),
    tickFs: z.number(),
    records: count,
    tags: count,
    unmapped: count,
    firstTick: z.bigint().nullable(),
    lastTick: z.bigint().nullable(),
    outOfOrder: count,
    sliceTick: z.literal(grid.sliceTick),
    firstSlice: z.literal(grid.first),
    slices: z.literal(slices),
    a: arm(a),
    b: arm(b),
    histogram: z.strictObject({
      loTick: z.number(),
      binTick: z.number(),
      counts: doubles(spec.histogram.bins),
    }),
    window: z.strictObject({ loTick: z.number(), hiTick: z.number(), shiftsTick: z.array(z.number()) }),
    prompt: pairs,
    shifted: pairs,
  });
  return z.strictObject({ part: z.literal(1), kind: z.literal('tags'), tally, head: border, tail: border });
}

function framePartSchema(spec: FrameSpec): z.ZodType<FramePart> {
  const { width, height, frames, blocks } = spec;
  const pixels = width * height;
  const cells = (2 * width - 1) * (2 * height - 1);
  const window = blockWindow(spec);
  const index = z.int().min(0);
  const touched = z.strictObject({
    block: index.max(blocks - 1),
    frames: count,
    total: z.number(),
    differences: count,
    plus: singles(window.nx * window.ny),
    minus: singles(window.nx * window.ny),
  });
  const segment = z
    .strictObject({
      first: index,
      last: index.max(Math.max(0, frames - 1)),
      firstImage: doubles(pixels),
      lastImage: doubles(pixels),
    })
    .refine(
      ({ first, last }) => first <= last,
      'a stretch of frames that begins before it ends was expected',
    );
  return z.strictObject({
    part: z.literal(2),
    kind: z.literal('frames'),
    key: z.literal(frameKey(spec)),
    totals: z.strictObject({
      sum: doubles(pixels),
      sumSquares: doubles(pixels),
      jointX: doubles(width * width),
      jointY: doubles(height * height),
      plus: doubles(cells),
      minus: doubles(cells),
      diagonal: doubles(pixels),
      joint: jointPixels(spec) > 0 ? doubles(jointLength(spec)) : z.never().optional(),
    }),
    touched: z.array(touched),
    segments: z.array(segment),
  });
}
