import type { Detector } from '../../../shared/contracts/detector';
import type { InspectionFacts } from '../../../shared/contracts/engine';
import type { ArrayColumn, BitField, Column, Layout } from '../../../shared/contracts/layout';
import type { Plane } from '../../../shared/contracts/plane';
import { FS_PER_PS } from '../../../shared/units/ticks';
import { formatCount, formatPlain, formatWithSigma } from '../../lib/format-number';

/** Amounts for reading: 41.2 M, 12.0 k. */
export function shortCount(count: number): string {
  if (count >= 1e9) return `${(count / 1e9).toFixed(2)} G`;
  if (count >= 1e6) return `${(count / 1e6).toFixed(1)} M`;
  if (count >= 1e4) return `${(count / 1e3).toFixed(1)} k`;
  return formatCount(count);
}

export function bytesWords(bytes: number): string {
  if (bytes >= 1e9) return `${(bytes / 1e9).toFixed(2)} GB`;
  if (bytes >= 1e6) return `${(bytes / 1e6).toFixed(1)} MB`;
  if (bytes >= 1e3) return `${(bytes / 1e3).toFixed(1)} kB`;
  return `${bytes} bytes`;
}

export function tickWords(tickFs: number): string {
  return `${formatPlain(tickFs / FS_PER_PS)} ps tick`;
}

function bitWords({ firstBit, bits }: BitField): string {
  return bits === 1 ? `bit ${firstBit}` : `bits ${firstBit}–${firstBit + bits - 1}`;
}

export function columnWords({ dataset, field }: Column): string {
  if (field === undefined) return dataset;
  return typeof field === 'number' ? `${dataset} column ${field}` : `${dataset} · ${field}`;
}

export function arrayWords({
  array,
  field,
}: {
  array?: string | undefined;
  field?: ArrayColumn['field'];
}): string {
  return columnWords({ dataset: array ?? 'the array', field });
}

export function layoutWords(layout: Layout): string {
  if (layout.format === 'records') {
    return `records · ${layout.recordBytes} bytes ${layout.byteOrder} · time ${bitWords(layout.time)}, channel ${bitWords(layout.channel)} · ${tickWords(layout.tickFs)}`;
  }
  if (layout.format === 'tiff') return 'TIFF frames';
  if (layout.format === 'text') {
    return `text · ${layout.delimiter} between columns · time column ${layout.timeColumn + 1}, channel column ${layout.channelColumn + 1} · ${tickWords(layout.tickFs)}`;
  }
  if (layout.format === 'npy') {
    if (layout.kind === 'frames') return `NumPy frames · ${arrayWords({ array: layout.array })}`;
    return `NumPy tags · ${arrayWords(layout.time)}, ${arrayWords(layout.channel)} · ${tickWords(layout.tickFs)}`;
  }
  if (layout.kind === 'frames') return `HDF5 frames · ${layout.dataset}`;
  return `HDF5 tags · ${columnWords(layout.time)}, ${columnWords(layout.channel)} · ${tickWords(layout.tickFs)}`;
}

export function factsWords(facts: InspectionFacts): string {
  if (facts.kind === 'tags')
    return `${shortCount(facts.records)} records · ${facts.channels.length} channels`;
  if (facts.kind === 'frames')
    return `${shortCount(facts.frames)} frames · ${facts.width} × ${facts.height} · ${facts.type}`;
  return 'nothing decoded';
}

export function detectorWords(detector: Detector): string {
  if (detector.kind === 'frames') {
    const masked = detector.maskedPixels.length;
    return `camera${masked > 0 ? ` · ${masked} masked` : ''}`;
  }
  const arrays = (['signal', 'idler'] as const).flatMap((arm) => {
    const map = detector[arm];
    return map === undefined ? [] : [`${arm} ${map.width} × ${map.height}`];
  });
  return [...arrays, ...(detector.bucket ? ['bucket'] : [])].join(' · ');
}

export function planeWords(plane: Plane): string {
  if (plane.kind === 'near') {
    const { value, sigma } = plane.magnification;
    return `near field · magnification ${formatWithSigma(value, sigma)}`;
  }
  const { value, sigma } = plane.focalLengthMm;
  return `far field · focal length ${formatWithSigma(value, sigma)} mm`;
}

export function durationWords(seconds: number): string {
  if (!Number.isFinite(seconds)) return 'unknown';
  if (seconds < 10) return `${seconds.toFixed(1)} s`;
  if (seconds < 120) return `${Math.round(seconds)} s`;
  return `${Math.round(seconds / 60)} min`;
}
