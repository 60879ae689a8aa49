import type { ArrayMap, Detector } from '../../../../shared/contracts/detector';
import type { InspectionFacts } from '../../../../shared/contracts/engine';

export interface DetectorProposal {
  detector: Detector;
  /** One sentence: what it was guessed from. */
  because: string;
}

/** The pitch cannot be guessed: positions count pixels until a person gives it, and no calibrated study runs before. */
export const UNKNOWN_PITCH_UM = 1;

/**
 * A proposal that went through a result: its placeholder stands where the pitch would. No detector array has so small a
 * pitch, and whoever has one is only asked again.
 */
export function isPitchKnown(detector: Detector): boolean {
  if (detector.kind === 'frames') return detector.pitchUm !== UNKNOWN_PITCH_UM;
  return [detector.signal, detector.idler].every((array) => array?.pitchUm !== UNKNOWN_PITCH_UM);
}

/** A square array with fewer pixels alive than this is not proposed. */
const LEAST_ALIVE = 0.7;
const MOST_SIDE = 128;

function square(side: number, firstChannel: number): ArrayMap {
  return {
    width: side,
    height: side,
    firstChannel,
    order: 'rows',
    flipX: false,
    flipY: false,
    pitchUm: UNKNOWN_PITCH_UM,
    maskedPixels: [],
    delayPs: 0,
    pixelDelayPs: [],
  };
}

interface Candidate {
  expected: number;
  first: number;
  last: number;
  build(): DetectorProposal;
}

function tags(detector: Omit<Extract<Detector, { kind: 'tags' }>, 'version' | 'kind'>): Detector {
  return { version: 1, kind: 'tags', ...detector };
}

function* candidates(lowest: number, withBucket: boolean): Iterable<Candidate> {
  for (const first of new Set([0, lowest])) {
    for (let side = 1; side <= MOST_SIDE; side++) {
      const n = side * side;
      const where = (extra: string): string =>
        `Channels ${first} to ${first + (withBucket ? n : 2 * n - 1)} fit ${extra}; correct it if the wiring differs.`;
      if (!withBucket) {
        yield {
          expected: n,
          first,
          last: first + n - 1,
          build: () => ({
            detector: tags({ signal: square(side, first) }),
            because: `Channels ${first} to ${first + n - 1} fit one array of ${side} × ${side}; correct it if the wiring differs.`,
          }),
        };
        yield {
          expected: 2 * n,
          first,
          last: first + 2 * n - 1,
          build: () => ({
            detector: tags({ signal: square(side, first), idler: square(side, first + n) }),
            because: where(`two arrays of ${side} × ${side}`),
          }),
        };
        continue;
      }
      // The bucket is wired before or after the array; which one, its rate tells (see below).
      for (const bucketFirst of [true, false]) {
        yield {
          expected: n + 1,
          first,
          last: first + n,
          build: () => ({
            detector: tags({
              bucket: { channel: bucketFirst ? first : first + n, delayPs: 0 },
              signal: square(side, bucketFirst ? first + 1 : first),
            }),
            because: where(`a bucket and one array of ${side} × ${side}`),
          }),
        };
      }
    }
  }
}

interface ChannelCount {
  channel: number;
  count: number;
}

/** Channels a gap apart are two arrays on inputs of their own; fewer missing channels are dead pixels. */
const LEAST_GAP = 4;

function proposeTwoRuns(channels: readonly ChannelCount[]): DetectorProposal | null {
  let cut = 0;
  const gapBefore = (i: number): number => channels[i]!.channel - channels[i - 1]!.channel;
  for (let i = 1; i < channels.length; i++) if (cut === 0 || gapBefore(i) > gapBefore(cut)) cut = i;
  if (cut === 0 || gapBefore(cut) <= LEAST_GAP) return null;
  const runs = [channels.slice(0, cut), channels.slice(cut)];
  const sides = runs.map((run) => {
    const span = run[run.length - 1]!.channel - run[0]!.channel + 1;
    const side = Math.ceil(Math.sqrt(span));
    return run.length >= LEAST_ALIVE * side * side && side <= MOST_SIDE ? side : 0;
  });
  const [side = 0, other = 0] = sides;
  if (side < 2 || side !== other) return null;
  const [first, second] = runs.map((run) => run[0]!.channel) as [number, number];
  // Arrays that would overlap are one run with a hole.
  if (first + side * side > second) return null;
  return {
    detector: tags({ signal: square(side, first), idler: square(side, second) }),
    because: `Channels from ${first} and from ${second} on fit two arrays of ${side} × ${side}; correct it if the wiring differs.`,
  };
}

function proposeTags(counts: readonly ChannelCount[]): DetectorProposal | null {
  const channels = counts.filter(({ count }) => count > 0).sort((a, b) => a.channel - b.channel);
  const [lowest, highest] = [channels[0], channels[channels.length - 1]];
  if (lowest === undefined || highest === undefined || channels.length < 2) return null;
  const total = channels.reduce((sum, { count }) => sum + count, 0);
  const loudest = channels.reduce((best, entry) => (entry.count > best.count ? entry : best));
  // One channel at an end of the range that sees a fifth of everything is a bucket, not a pixel.
  const atEnd = loudest === lowest || loudest === highest;
  const withBucket = channels.length > 4 && atEnd && loudest.count > total / 5;
  let best: { share: number; build(): DetectorProposal } | null = null;
  for (const { expected, first, last, build } of candidates(lowest.channel, withBucket)) {
    if (lowest.channel < first || highest.channel > last) continue;
    const share = channels.length / expected;
    if (share < LEAST_ALIVE || (best !== null && share < best.share)) continue;
    const proposal = build();
    const { detector } = proposal;
    if (withBucket && detector.kind === 'tags' && detector.bucket?.channel !== loudest.channel) continue;
    if (best === null || share > best.share) best = { share, build: () => proposal };
  }
  return proposeTwoRuns(channels) ?? (best === null ? null : best.build());
}

/** A detector map guessed from the channels seen; null when no plain arrangement fits. */
export function proposeDetector(facts: InspectionFacts): DetectorProposal | null {
  if (facts.kind === 'tags') return proposeTags(facts.channels);
  if (facts.kind === 'none') return null;
  return {
    detector: { version: 1, kind: 'frames', pitchUm: UNKNOWN_PITCH_UM, maskedPixels: [] },
    because: `Frames of ${facts.width} × ${facts.height} pixels; give the pitch for lengths in µm.`,
  };
}
