import type { ArmSpec, ArmTally, TagSpec, TagTally } from '../../shared/contracts/tally';
import { edgeTicks } from './pair-cache-edges';
import type { KeptPart } from './pair-cache-keeper';
import type { RemovedPixels } from './pair-cache-map';
import { SliceGrid } from './slice-grid';

/** The part of a tally that does not depend on pairs. */
export type TagFrame = Omit<TagTally, 'histogram' | 'window' | 'prompt' | 'shifted'>;

/** As counted, in arrays of its own. */
export function copyFrame(frame: TagFrame, spec: TagSpec): TagFrame {
  const copy = (arm: ArmTally, { masked }: ArmSpec): ArmTally => ({
    ...arm,
    singles: arm.singles.slice(),
    singlesPerSlice: arm.singlesPerSlice.slice(),
    masked: masked.slice(),
  });
  return { ...frame, a: copy(frame.a, spec.a), b: copy(frame.b, spec.b) };
}

/** As counting without the removed pixels gives it; null when what was kept does not tell. */
export function frameWithout(
  frame: TagFrame,
  kept: KeptPart,
  removed: RemovedPixels,
  spec: TagSpec,
): TagFrame | null {
  const { singles } = kept;
  if (singles === null) return null;
  const pixelsA = removed.a.length;
  const sites = pixelsA + removed.b.length;
  const lost = sumWhere(frame.a.singles, removed.a) + sumWhere(frame.b.singles, removed.b);
  const tags = frame.tags - lost;
  const isKept = (site: number): boolean =>
    (site < pixelsA ? removed.a[site] : removed.b[site - pixelsA]) === 0;
  const ticks = tags === 0 ? { firstTick: null, lastTick: null } : edgeTicks(kept.edges, isKept);
  if (ticks === null) return null;
  const grid = new SliceGrid(frame.tickFs);
  if (ticks.firstTick !== null) grid.cover(ticks.firstTick, ticks.lastTick);
  // Fewer tags may span less time, and what was counted in longer slices cannot be cut.
  if (tags > 0 && grid.sliceTick !== frame.sliceTick) return null;
  const skipped = grid.first - frame.firstSlice;
  const arm = (was: ArmTally, gone: Uint8Array, firstSite: number, { masked }: ArmSpec): ArmTally => {
    const singlesPerSlice = new Float64Array(grid.count);
    for (let k = 0; k < grid.count; k++) {
      const row = (skipped + k) * sites + firstSite;
      for (let p = 0; p < gone.length; p++) if (gone[p] === 0) singlesPerSlice[k]! += singles[row + p]!;
    }
    const left = was.singles.map((count, pixel) => (gone[pixel] === 0 ? count : 0));
    return { ...was, singles: left, singlesPerSlice, masked: masked.slice() };
  };
  return {
    ...frame,
    ...ticks,
    tags,
    unmapped: frame.unmapped + lost,
    sliceTick: grid.sliceTick,
    firstSlice: grid.first,
    slices: grid.count,
    a: arm(frame.a, removed.a, 0, spec.a),
    b: arm(frame.b, removed.b, pixelsA, spec.b),
  };
}

function sumWhere(counts: Float64Array, where: Uint8Array): number {
  return counts.reduce((sum, count, i) => sum + count * where[i]!, 0);
}
