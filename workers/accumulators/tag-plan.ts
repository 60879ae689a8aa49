import type { ArmSpec, TagSpec } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import type { ScanRange } from '../kernels/tag-scan';

const CHANNELS = 65536;
/** Disorder of the file that is put right, beyond what channel delays cause: 5 ms. */
const DISORDER_FS = 5e12;

/** What a tag specification means for the loops: lookup tables and reaches, all in ticks. */
export interface TagPlan extends ScanRange {
  sites: number;
  /** Site of each channel, -1 when it belongs to no arm or is masked. */
  siteOfChannel: Int32Array;
  delayOfChannel: Float64Array;
  /** Those that have a site: a few hundred of 65536, mostly. */
  channels: number[];
  /** Largest |tau| of any use. */
  reachTick: number;
  /** A tag may come this long after a later one and still meet all its partners. */
  horizonTick: number;
}

/** @throws Problem `bad-dial` for ticks that are not whole, `bad-detector` for a channel in both arms. */
export function planTags(spec: TagSpec): TagPlan {
  requireWhole(spec);
  const { siteOfChannel, delayOfChannel, channels, delaySpreadTick } = planChannels(spec);
  const { loTick, binTick, bins } = spec.histogram;
  const centres = spec.window === null ? [] : [0, ...spec.window.shiftsTick];
  const kept = spec.keepPairs;
  const hullLoTick = Math.min(
    ...centres.map((shift) => shift + (spec.window?.loTick ?? 0)),
    kept?.minTauTick ?? Number.POSITIVE_INFINITY,
  );
  const hullHiTick = Math.max(
    ...centres.map((shift) => shift + (spec.window?.hiTick ?? 0)),
    kept?.maxTauTick ?? Number.NEGATIVE_INFINITY,
  );
  const minTauTick = Math.min(hullLoTick, bins > 0 ? loTick : Number.POSITIVE_INFINITY);
  const maxTauTick = Math.max(hullHiTick, bins > 0 ? loTick + bins * binTick - 1 : Number.NEGATIVE_INFINITY);
  const sitesA = spec.a.width * spec.a.height;
  return {
    sitesA,
    sites: sitesA + spec.b.width * spec.b.height,
    siteOfChannel,
    delayOfChannel,
    channels,
    minTauTick,
    maxTauTick,
    loTick,
    binTick,
    hullLoTick,
    hullHiTick,
    reachTick: Math.max(0, maxTauTick, -minTauTick),
    horizonTick: Math.ceil(DISORDER_FS / spec.tickFs) + delaySpreadTick,
  };
}

function requireWhole(spec: TagSpec): void {
  const { loTick, binTick, bins } = spec.histogram;
  const window = spec.window ?? { loTick: 0, hiTick: 0, shiftsTick: [] };
  const { minTauTick, maxTauTick } = spec.keepPairs ?? { minTauTick: 0, maxTauTick: 0 };
  const whole = [
    loTick,
    binTick,
    bins,
    window.loTick,
    window.hiTick,
    ...window.shiftsTick,
    minTauTick,
    maxTauTick,
  ];
  if (!whole.every(Number.isSafeInteger) || binTick < 1 || bins < 0) {
    throw new Problem(
      'bad-dial',
      'Histogram and windows must be whole ticks with bins of at least one tick; round them to the tick of the file.',
    );
  }
}

function planChannels(spec: TagSpec) {
  const siteOfChannel = new Int32Array(CHANNELS).fill(-1);
  const delayOfChannel = new Float64Array(CHANNELS);
  const channels: number[] = [];
  const place = ({ pixelOfChannel, delayTickOfChannel }: ArmSpec, firstSite: number): void => {
    const stop = Math.min(CHANNELS, pixelOfChannel.length);
    for (let channel = 0; channel < stop; channel++) {
      const pixel = pixelOfChannel[channel]!;
      if (pixel < 0) continue;
      if (siteOfChannel[channel]! >= 0) {
        throw new Problem(
          'bad-detector',
          `Channel ${channel} is in both arms of the detector map; give each channel to one arm.`,
        );
      }
      siteOfChannel[channel] = firstSite + pixel;
      delayOfChannel[channel] = delayTickOfChannel[channel] ?? 0;
      channels.push(channel);
    }
  };
  place(spec.a, 0);
  place(spec.b, spec.a.width * spec.a.height);
  let least = Number.POSITIVE_INFINITY;
  let most = Number.NEGATIVE_INFINITY;
  for (const channel of channels) {
    least = Math.min(least, delayOfChannel[channel]!);
    most = Math.max(most, delayOfChannel[channel]!);
  }
  return { siteOfChannel, delayOfChannel, channels, delaySpreadTick: most >= least ? most - least : 0 };
}
