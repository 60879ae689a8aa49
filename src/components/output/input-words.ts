import type { ArrayMap, Detector } from '../../../shared/contracts/detector';
import type { ArrayColumn, BitField, Column, Layout, TextLayout } from '../../../shared/contracts/layout';
import type { Calibrated, Plane } from '../../../shared/contracts/plane';
import { FS_PER_PS, FS_PER_S } from '../../../shared/units/ticks';
import { formatPlain, formatQuantity, formatWithSigma } from '../../lib/format-number';

/** How an input is read, in lines of a few words: the one wording for the shelf, presets, results and provenance. */

function columnWords({ dataset, field }: Column): string {
  if (field === undefined) return dataset;
  return typeof field === 'number' ? `${dataset}, column ${field}` : `${dataset}, member ${field}`;
}

function arrayWords({ array, field }: ArrayColumn): string {
  if (array !== undefined || field === undefined)
    return columnWords({ dataset: array ?? 'the array', field });
  return typeof field === 'number' ? `column ${field}` : `field ${field}`;
}

function bitWords({ firstBit, bits }: BitField): string {
  return bits === 1 ? `bit ${firstBit}` : `bits ${firstBit} to ${firstBit + bits - 1}`;
}

function tickWords(tickFs: number): string {
  return `tick ${formatPlain(tickFs / FS_PER_PS)} ps`;
}

const ROLLOVER_WORDS = {
  none: 'time never wraps',
  wrap: 'time wraps at its range',
  marker: 'wraps told by marker records',
} as const;

export const DELIMITER_WORDS = {
  comma: 'commas',
  semicolon: 'semicolons',
  tab: 'tabs',
  space: 'blanks',
} as const;

/** Names of the units a text column may count time in, with their length in femtoseconds. */
export const TIME_UNITS = [
  { unit: 's', fs: FS_PER_S },
  { unit: 'ms', fs: 1e12 },
  { unit: 'µs', fs: 1e9 },
  { unit: 'ns', fs: 1e6 },
  { unit: 'ps', fs: FS_PER_PS },
  { unit: 'fs', fs: 1 },
] as const;

function timeUnitWords({ timeUnitFs, tickFs }: TextLayout): string {
  const named = TIME_UNITS.find(({ fs }) => fs === timeUnitFs);
  if (named !== undefined) return named.unit;
  return timeUnitFs === tickFs ? 'ticks' : `units of ${formatPlain(timeUnitFs / FS_PER_PS)} ps`;
}

export function describeLayout(layout: Layout): string[] {
  switch (layout.format) {
    case 'records': {
      const header = layout.headerBytes === 0 ? [] : [`after a header of ${layout.headerBytes} bytes`];
      return [
        `time tags in records of ${layout.recordBytes} bytes, ${layout.byteOrder}-endian`,
        ...header,
        `time in ${bitWords(layout.time)}, channel in ${bitWords(layout.channel)}`,
        `${tickWords(layout.tickFs)}, ${ROLLOVER_WORDS[layout.rollover.in]}`,
      ];
    }
    case 'text': {
      const { headerLines, timeColumn, channelColumn, delimiter, decimal } = layout;
      return [
        `time tags in lines of text, ${DELIMITER_WORDS[delimiter]} between columns, decimal ${decimal}`,
        ...(headerLines === 0 ? [] : [`after ${headerLines} header ${headerLines === 1 ? 'line' : 'lines'}`]),
        `time in column ${timeColumn + 1} in ${timeUnitWords(layout)}, channel in column ${channelColumn + 1}`,
        tickWords(layout.tickFs),
      ];
    }
    case 'tiff':
      return ['frames in the pages of a TIFF file'];
    case 'npy':
      if (layout.kind === 'frames')
        return [`frames in a NumPy array${layout.array === undefined ? '' : `, ${layout.array}`}`];
      return [
        'time tags in NumPy arrays',
        `time in ${arrayWords(layout.time)}`,
        `channel in ${arrayWords(layout.channel)}`,
        tickWords(layout.tickFs),
      ];
    case 'hdf5':
      if (layout.kind === 'frames') return [`frames in an HDF5 dataset, ${layout.dataset}`];
      return [
        'time tags in HDF5 datasets',
        `time in ${columnWords(layout.time)}`,
        `channel in ${columnWords(layout.channel)}`,
        tickWords(layout.tickFs),
      ];
  }
}

function describeArray(arm: string, map: ArrayMap, pitchGiven: boolean): string {
  const last = map.firstChannel + map.width * map.height - 1;
  const flips = [map.flipX ? 'x' : '', map.flipY ? 'y' : ''].filter(Boolean).join(' and ');
  const parts = [
    `${arm} ${map.width} × ${map.height}, channels ${map.firstChannel} to ${last} by ${map.order}`,
    ...(pitchGiven ? [`pitch ${formatPlain(map.pitchUm)} µm`] : []),
    ...(flips === '' ? [] : [`${flips} flipped`]),
    ...(map.delayPs === 0 ? [] : [`delayed by ${formatPlain(map.delayPs)} ps`]),
    ...(map.pixelDelayPs.length === 0 ? [] : ['a delay for each pixel']),
    ...(map.maskedPixels.length === 0 ? [] : [`${map.maskedPixels.length} masked`]),
  ];
  return parts.join(', ');
}

/** `pitchGiven` false: the map is a proposal with a stand-in for the pitch, which is not told. */
export function describeDetector(detector: Detector, pitchGiven = true): string[] {
  if (detector.kind === 'frames') {
    const pitch = pitchGiven ? `, pitch ${formatPlain(detector.pitchUm)} µm` : '';
    const masked = detector.maskedPixels.length === 0 ? '' : `, ${detector.maskedPixels.length} masked`;
    return [`frames${pitch}${masked}`];
  }
  const { signal, idler, bucket } = detector;
  return [
    ...(signal === undefined ? [] : [describeArray('signal', signal, pitchGiven)]),
    ...(idler === undefined ? [] : [describeArray('idler', idler, pitchGiven)]),
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
