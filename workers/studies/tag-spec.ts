import type { Arm, ArrayMap, Detector } from '../../shared/contracts/detector';
import type { ArmSpec, TagSpec, TagTally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { psToTicks, ticksToPs } from '../../shared/units/ticks';

const CHANNELS = 65536;
/** Guard against histograms nobody can hold or draw. */
export const MAX_HISTOGRAM_BINS = 2 ** 18;

/** @throws Problem `bad-detector` when a channel passes 65535, or a mask or delay list does not fit the array. */
export function buildArm(map: ArrayMap, tickFs: number, name = 'array'): ArmSpec {
  const { width, height, firstChannel } = map;
  const pixels = width * height;
  const lastChannel = firstChannel + pixels - 1;
  if (lastChannel >= CHANNELS) {
    throw new Problem(
      'bad-detector',
      `The ${name} of ${width} x ${height} pixels from channel ${firstChannel} ends at channel ${lastChannel}, past 65535; lower its first channel or its size.`,
      name,
    );
  }
  if (map.pixelDelayPs.length !== 0 && map.pixelDelayPs.length !== pixels) {
    throw new Problem(
      'bad-detector',
      `The ${name} has ${pixels} pixels but ${map.pixelDelayPs.length} pixel delays; give one for each pixel, or none.`,
      name,
    );
  }
  const masked = maskOf(map, pixels, name);
  const pixelOfChannel = new Int32Array(CHANNELS).fill(-1);
  const delayTickOfChannel = new Int32Array(CHANNELS);
  for (let index = 0; index < pixels; index++) {
    const pixel = pixelAt(map, index);
    const channel = firstChannel + index;
    if (masked[pixel] === 0) pixelOfChannel[channel] = pixel;
    delayTickOfChannel[channel] = delayTick(map.delayPs + (map.pixelDelayPs[pixel] ?? 0), tickFs, name);
  }
  return { width, height, pixelOfChannel, delayTickOfChannel, masked };
}

/** A detector without pixels: one channel, a 1 x 1 array. */
export function bucketArm(channel: number, delayPs: number, tickFs: number): ArmSpec {
  const pixelOfChannel = new Int32Array(CHANNELS).fill(-1);
  const delayTickOfChannel = new Int32Array(CHANNELS);
  pixelOfChannel[channel] = 0;
  delayTickOfChannel[channel] = delayTick(delayPs, tickFs, 'bucket');
  return { width: 1, height: 1, pixelOfChannel, delayTickOfChannel, masked: new Uint8Array(1) };
}

/** The arm of a detector map, whichever it is. @throws Problem `bad-detector` when the map does not have it. */
export function detectorArm(detector: Detector, arm: Arm, tickFs: number): ArmSpec {
  if (detector.kind !== 'tags') {
    throw new Problem('bad-detector', 'Time tags need a detector map of channels; this one is for frames.');
  }
  if (arm === 'bucket' && detector.bucket !== undefined) {
    return bucketArm(detector.bucket.channel, detector.bucket.delayPs, tickFs);
  }
  const map = arm === 'bucket' ? undefined : detector[arm];
  if (map === undefined) {
    throw new Problem('bad-detector', `The detector map has no ${arm} arm; add it in the detector map.`, arm);
  }
  return buildArm(map, tickFs, `${arm} arm`);
}

/** @throws Problem `bad-detector` naming the first channel that both arms claim. */
export function assertArmsApart(a: ArmSpec, b: ArmSpec): void {
  for (let channel = 0; channel < CHANNELS; channel++) {
    if (a.pixelOfChannel[channel]! >= 0 && b.pixelOfChannel[channel]! >= 0) {
      throw new Problem(
        'bad-detector',
        `Channel ${channel} is in both arms of the detector map; give each channel to one arm.`,
      );
    }
  }
}

export interface TagSpecRequest {
  a: ArmSpec;
  b: ArmSpec;
  tickFs: number;
  /** Centre of the window on tau = t_B - t_A, and its full width. */
  delayPs: number;
  windowPs: number;
  shiftStepPs: number;
  shiftCount: number;
  /** Half range around the delay, and bin width; both are rounded to whole ticks. */
  histogramRangePs: number;
  histogramBinPs: number;
}

/**
 * The main pass: prompt window, shifted windows at delay +- j * step (half on either side, the odd one above), and a
 * histogram around the delay. A window is as many whole ticks as come nearest to the width asked for, centred as nearly
 * as ticks allow; `effectiveWidthPs` says what it came to.
 * @throws Problem `bad-dial` when the shifted windows would come closer than two window widths; `bad-detector` for
 * arms that share a channel.
 */
export function buildTagSpec(request: TagSpecRequest): TagSpec {
  const { a, b, tickFs } = request;
  assertArmsApart(a, b);
  const centre = psToTicks(request.delayPs, tickFs);
  const width = Math.max(1, Math.round(psToTicks(request.windowPs, tickFs)));
  const loTick = Math.round(centre - (width - 1) / 2);
  const step = Math.round(psToTicks(request.shiftStepPs, tickFs));
  if (step < 2 * width) {
    throw new Problem(
      'bad-dial',
      `The dial "shift.step" must be at least twice the coincidence window, ${ticksToPs(2 * width, tickFs)} ps here, so that the shifted windows hold no pairs of the peak; ${request.shiftStepPs} ps was given.`,
      'shift.step',
    );
  }
  const shiftsTick: number[] = [];
  for (let n = 0; n < request.shiftCount; n++) {
    const multiple = Math.floor(n / 2) + 1;
    shiftsTick.push(n % 2 === 0 ? multiple * step : -multiple * step);
  }
  return {
    kind: 'tags',
    tickFs,
    a,
    b,
    histogram: histogramAround(centre, request.histogramRangePs, request.histogramBinPs, tickFs),
    window: { loTick, hiTick: loTick + width - 1, shiftsTick },
  };
}

/** Bins of whole ticks, symmetric about `centreTick` as nearly as ticks allow, covering at least +- the range. */
export function histogramAround(
  centreTick: number,
  rangePs: number,
  binPs: number,
  tickFs: number,
): TagSpec['histogram'] {
  const range = psToTicks(rangePs, tickFs);
  const asked = Math.max(1, Math.round(psToTicks(binPs, tickFs)));
  const binTick = Math.max(asked, Math.ceil((2 * range) / MAX_HISTOGRAM_BINS));
  const bins = 2 * Math.ceil(range / binTick - 0.5) + 1;
  return { loTick: Math.round(centreTick - (bins * binTick - 1) / 2), binTick, bins: Math.max(1, bins) };
}

/** Full width of the prompt window in ps: both end ticks count, and each tick stands for its whole length. */
export function effectiveWidthPs(tally: Pick<TagTally, 'window' | 'tickFs'>): number {
  const { loTick, hiTick } = tally.window;
  return ticksToPs(Math.max(0, hiTick - loTick + 1), tally.tickFs);
}

/** Pixel y * width + x, after flips, of the n-th channel of the array. */
function pixelAt(map: ArrayMap, index: number): number {
  const { width, height } = map;
  const rows = map.order === 'rows';
  const x = rows ? index % width : Math.floor(index / height);
  const y = rows ? Math.floor(index / width) : index % height;
  return (map.flipY ? height - 1 - y : y) * width + (map.flipX ? width - 1 - x : x);
}

function maskOf(map: ArrayMap, pixels: number, name: string): Uint8Array {
  const masked = new Uint8Array(pixels);
  for (const pixel of map.maskedPixels) {
    if (pixel >= pixels) {
      throw new Problem(
        'bad-detector',
        `Masked pixel ${pixel} is not in the ${name}, whose pixels run from 0 to ${pixels - 1}; correct the mask.`,
        name,
      );
    }
    masked[pixel] = 1;
  }
  return masked;
}

function delayTick(delayPs: number, tickFs: number, name: string): number {
  const ticks = Math.round(psToTicks(delayPs, tickFs));
  if (Math.abs(ticks) > 2 ** 31 - 1) {
    throw new Problem(
      'bad-detector',
      `A delay of ${delayPs} ps in the ${name} is more than 2^31 ticks of this file; shorten it.`,
      name,
    );
  }
  return ticks;
}
