import type { ArrayMap, Detector } from '../../../../shared/contracts/detector';
import type { BitField, Column, Layout } from '../../../../shared/contracts/layout';
import type { Calibrated, Plane } from '../../../../shared/contracts/plane';
import { FS_PER_PS } from '../../../../shared/units/ticks';
import { formatPlain, formatQuantity, formatWithSigma } from '../../../lib/format-number';

/** How an input is read, as sentences of a few words, for pages that show settings without changing them. */

function describeColumn({ dataset, field }: Column): string {
  if (field === undefined) return dataset;
  return typeof field === 'number' ? `${dataset}, column ${field}` : `${dataset}, member ${field}`;
}

function describeBits({ firstBit, bits }: BitField): string {
  return bits === 1 ? `bit ${firstBit}` : `bits ${firstBit} to ${firstBit + bits - 1}`;
}

function describeTick(tickFs: number): string {
  return `tick ${formatPlain(tickFs / FS_PER_PS)} ps`;
}

export function describeLayout(layout: Layout): string[] {
  if (layout.format === 'records') {
    const rollover = {
      none: 'time never wraps',
      wrap: 'time wraps at its range',
      marker: 'wraps told by marker records',
    }[layout.rollover.in];
    const header = layout.headerBytes === 0 ? [] : [`after a header of ${layout.headerBytes} bytes`];
    return [
      `time tags in records of ${layout.recordBytes} bytes, ${layout.byteOrder}-endian`,
      ...header,
      `time in ${describeBits(layout.time)}, channel in ${describeBits(layout.channel)}`,
      `${describeTick(layout.tickFs)}, ${rollover}`,
    ];
  }
  if (layout.format === 'tiff') return ['frames in the pages of a TIFF file'];
  if (layout.format === 'text') {
    return [
      `time tags in text, ${layout.delimiter} between columns, decimal ${layout.decimal}`,
      `time in column ${layout.timeColumn + 1}, channel in column ${layout.channelColumn + 1}`,
      describeTick(layout.tickFs),
    ];
  }
  if (layout.format === 'npy') {
    if (layout.kind === 'frames')
      return [`frames in a NumPy array${layout.array ? `, ${layout.array}` : ''}`];
    return [
      'time tags in NumPy arrays',
      `time in ${describeColumn({ dataset: layout.time.array ?? 'the array', field: layout.time.field })}`,
      `channel in ${describeColumn({ dataset: layout.channel.array ?? 'the array', field: layout.channel.field })}`,
      describeTick(layout.tickFs),
    ];
  }
  if (layout.kind === 'frames') return [`frames in an HDF5 dataset, ${layout.dataset}`];
  return [
    'time tags in HDF5 datasets',
    `time in ${describeColumn(layout.time)}`,
    `channel in ${describeColumn(layout.channel)}`,
    describeTick(layout.tickFs),
  ];
}

function describeArray(arm: string, map: ArrayMap): string {
  const last = map.firstChannel + map.width * map.height - 1;
  const flips = [map.flipX ? 'x' : '', map.flipY ? 'y' : ''].filter(Boolean).join(' and ');
  const parts = [
    `${arm} ${map.width} × ${map.height}, channels ${map.firstChannel} to ${last} by ${map.order}`,
    `pitch ${formatPlain(map.pitchUm)} µm`,
    ...(flips === '' ? [] : [`${flips} flipped`]),
    ...(map.delayPs === 0 ? [] : [`delayed by ${formatPlain(map.delayPs)} ps`]),
    ...(map.pixelDelayPs.length === 0 ? [] : ['a delay for each pixel']),
    ...(map.maskedPixels.length === 0 ? [] : [`${map.maskedPixels.length} masked`]),
  ];
  return parts.join(', ');
}

export function describeDetector(detector: Detector): string[] {
  if (detector.kind === 'frames') {
    const masked = detector.maskedPixels.length === 0 ? '' : `, ${detector.maskedPixels.length} masked`;
    return [`frames, pitch ${formatPlain(detector.pitchUm)} µm${masked}`];
  }
  const { signal, idler, bucket } = detector;
  return [
    ...(signal === undefined ? [] : [describeArray('signal', signal)]),
    ...(idler === undefined ? [] : [describeArray('idler', idler)]),
    ...(bucket === undefined ? [] : [`bucket on channel ${bucket.channel}`]),
  ];
}

function calibrated({ value, sigma }: Calibrated, unit: string): string {
  return formatQuantity({ value, sigma, unit });
}

export function describePlane(plane: Plane): string[] {
  if (plane.kind === 'near') {
    const { value, sigma } = plane.magnification;
    return [`near field, magnification ${formatWithSigma(value, sigma)}`];
  }
  return [
    `far field, focal length ${calibrated(plane.focalLengthMm, 'mm')}`,
    `signal ${calibrated(plane.signalNm, 'nm')}, idler ${calibrated(plane.idlerNm, 'nm')}`,
  ];
}
