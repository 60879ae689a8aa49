import type { ArmSpec, TagSpec } from '../../shared/contracts/tally';

/** Pixels of a counted map that another map leaves out. */
export interface RemovedPixels {
  a: Uint8Array;
  b: Uint8Array;
  any: boolean;
}

/**
 * What the wanted map masks of the counted one; null when it differs in anything but its mask: pixels, channels, delays,
 * or a spread of delays that no longer is the same without the masked channels (it decides what is out of order).
 */
export function removedPixels(counted: TagSpec, wanted: TagSpec): RemovedPixels | null {
  const a = removedOfArm(counted.a, wanted.a);
  const b = removedOfArm(counted.b, wanted.b);
  if (a === null || b === null || counted.tickFs !== wanted.tickFs) return null;
  const any = a.includes(1) || b.includes(1);
  if (any && delaySpread(counted) !== delaySpread(wanted)) return null;
  return { a, b, any };
}

export function isSameRemoved(p: RemovedPixels, q: RemovedPixels): boolean {
  return p.a.every((gone, i) => gone === q.a[i]) && p.b.every((gone, i) => gone === q.b[i]);
}

function removedOfArm(counted: ArmSpec, wanted: ArmSpec): Uint8Array | null {
  if (counted.width !== wanted.width || counted.height !== wanted.height) return null;
  const removed = new Uint8Array(counted.width * counted.height);
  const stays = new Uint8Array(removed.length);
  for (let channel = 0; channel < counted.pixelOfChannel.length; channel++) {
    const was = counted.pixelOfChannel[channel]!;
    const is = wanted.pixelOfChannel[channel]!;
    if (is >= 0) {
      if (is !== was) return null;
      if (counted.delayTickOfChannel[channel] !== wanted.delayTickOfChannel[channel]) return null;
      stays[is] = 1;
    } else if (was >= 0) {
      removed[was] = 1;
    }
  }
  // Two channels of one pixel, only one of them left out: its tags cannot be told apart any more.
  return removed.some((one, pixel) => one === 1 && stays[pixel] === 1) ? null : removed;
}

function delaySpread({ a, b }: TagSpec): number {
  let least = Number.POSITIVE_INFINITY;
  let most = Number.NEGATIVE_INFINITY;
  for (const { pixelOfChannel, delayTickOfChannel } of [a, b]) {
    for (let channel = 0; channel < pixelOfChannel.length; channel++) {
      if (pixelOfChannel[channel]! < 0) continue;
      least = Math.min(least, delayTickOfChannel[channel]!);
      most = Math.max(most, delayTickOfChannel[channel]!);
    }
  }
  return most - least;
}
