import type { MapData } from '../../shared/contracts/output';
import type { ArmTally } from '../../shared/contracts/tally';
import { peakModel } from '../../shared/physics/fit-peak';
import type { TagCount } from './tag-count';

/** All-pairs delay histogram in ns, with sqrt(H) errors and, where a peak was fitted, the Gaussian on its base. */
export function histogramMap(count: TagCount): MapData {
  const { lo, step, counts } = count.histogram;
  const data = Float64Array.from(counts);
  const map: MapData = {
    label: 'Delay histogram',
    shape: [data.length],
    axes: [{ label: 'delay', unit: 'ns', start: (lo + step / 2) / 1000, step: step / 1000, arm: 'pair' }],
    unit: 'pairs',
    scale: 'counts',
    data,
    sigma: data.map(Math.sqrt),
  };
  const { fit } = count;
  return fit === null ? map : { ...map, model: data.map((_, m) => peakModel(fit, lo, step, m)) };
}

/** Tags per second over the run, one value a slice; slices of which less than a twentieth was recorded are masked. */
export function rateMap(count: TagCount, arm: 'a' | 'b', name: string): MapData {
  const { seconds, lengthS, startS } = count.times;
  const tags = count.tally[arm].singlesPerSlice;
  const masked = Uint8Array.from(seconds, (s) => (s < lengthS / 20 ? 1 : 0));
  const perSecond = (value: number, k: number): number => (masked[k] === 1 ? 0 : value / seconds[k]!);
  return {
    label: `Rate of the ${name} arm`,
    shape: [tags.length],
    axes: [{ label: 'time', unit: 's', start: startS + lengthS / 2, step: lengthS }],
    unit: '1/s',
    scale: 'counts',
    data: tags.map(perSecond),
    masked,
    sigma: tags.map((n, k) => perSecond(Math.sqrt(n), k)),
  };
}

/** Tags of every pixel over the whole run. */
export function singlesMap(arm: ArmTally, name: string): MapData {
  return pixelMap(`Singles of the ${name} arm`, arm, arm.singles, arm.singles.map(Math.sqrt), name);
}

/** A map over the pixels of one array, axes in pixels. */
export function pixelMap(
  label: string,
  arm: Pick<ArmTally, 'width' | 'height' | 'masked'>,
  data: Float64Array,
  sigma: Float64Array,
  name: string,
): MapData {
  const axis = { unit: 'px', start: 0, step: 1, ...(isArrayArm(name) ? { arm: name } : {}) };
  return {
    label,
    shape: [arm.height, arm.width],
    axes: [
      { label: `x ${name}`, ...axis },
      { label: `y ${name}`, ...axis },
    ],
    unit: 'counts',
    scale: 'counts',
    data: Float64Array.from(data),
    masked: Uint8Array.from(arm.masked),
    sigma,
  };
}

function isArrayArm(name: string): name is 'signal' | 'idler' {
  return name === 'signal' || name === 'idler';
}
