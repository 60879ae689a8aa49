import type { Block } from '../../shared/contracts/blocks';
import type { Tally, TallySpec } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { type CompiledKernels, NO_COMPILED_KERNELS } from './compiled-kernels';
import { createFrameAccumulator, frameAccumulatorFromPart } from './frame-accumulator';
import type { FramePart } from './frame-part';
import { createTagAccumulator, TagAccumulator, tagAccumulatorFromPart } from './tag-accumulator';
import type { TagPart } from './tag-part';

export type Part = TagPart | FramePart;

/**
 * What all accumulators have in common: they take blocks in any chunking, merge with the range that follows, and can
 * be looked at while they fill.
 */
export interface Accumulator {
  readonly kind: Tally['kind'];
  /** @throws Problem `bad-input` for a block of the other kind. */
  push(block: Block): void;
  /** `next` is the later range of the same acquisition; it stays usable. */
  merge(next: Accumulator): void;
  /** A copy of what has been counted so far. */
  tally(): Tally;
  /** A copy as plain data: structured-clone-able, its buffers (`transferablesOf`) transferable. */
  toPart(): Part;
  /** After counting: gives compiled memory back. It must not be used any more. */
  release?(): void;
}

/**
 * With compiled kernels the counts are the same and come faster. `leastBits`: slices of time are at least 2^leastBits
 * ticks long, where it is known that the whole acquisition needs that.
 */
export function createAccumulator(
  spec: TallySpec,
  kernels: CompiledKernels = NO_COMPILED_KERNELS,
  leastBits = 0,
): Accumulator {
  return spec.kind === 'tags'
    ? createTagAccumulator(spec, kernels.tags, leastBits)
    : createFrameAccumulator(spec, kernels.frames);
}

/** @throws Problem when the part is newer than this engine or does not belong to the specification. */
export function accumulatorFromPart(spec: TallySpec, part: Part): Accumulator {
  if (spec.kind === 'tags' && part.kind === 'tags') return tagAccumulatorFromPart(spec, part);
  if (spec.kind === 'frames' && part.kind === 'frames') return frameAccumulatorFromPart(spec, part);
  throw new Problem('bad-input', `A part of ${spec.kind} was expected, one of ${part.kind} was found.`);
}

/** As `merge` of an accumulator made from the part of `spec`, without making one where that can be avoided. */
export function mergePart(into: Accumulator, spec: TallySpec, part: Part): void {
  if (into instanceof TagAccumulator && part.kind === 'tags') into.mergePart(part);
  else into.merge(accumulatorFromPart(spec, part));
}
