import { describe, expect, it } from 'vitest';
import type { Layout, RecordsLayout, TextLayout } from '../../../../shared/contracts/layout';
import {
  columnOptions,
  frameOptions,
  toArrayColumn,
} from '../../../../src/features/bench/model/column-options';
import { proposeDetector } from '../../../../src/features/bench/model/propose-detector';
import { readDetector, readPixels, readPlane } from '../../../../src/features/bench/model/read-detector';
import { readLayout } from '../../../../src/features/bench/model/read-layout';
import { draftReading } from '../../../../src/features/bench/model/reading-draft';
import { inspectionOf } from './fake-engine';

const records: RecordsLayout = {
  version: 1,
  format: 'records',
  kind: 'tags',
  recordBytes: 4,
  byteOrder: 'little',
  headerBytes: 16,
  time: { firstBit: 0, bits: 21 },
  channel: { firstBit: 21, bits: 10 },
  rollover: {
    in: 'marker',
    when: [{ field: { firstBit: 31, bits: 1 }, equals: 1 }],
    advanceTick: 2097152,
    wraps: 'time-field',
  },
  skip: [[{ field: { firstBit: 21, bits: 10 }, equals: 1023 }]],
  tickFs: 10_000,
};

const textLayout: TextLayout = {
  version: 1,
  format: 'text',
  kind: 'tags',
  delimiter: 'comma',
  decimal: 'point',
  headerLines: 1,
  timeColumn: 0,
  channelColumn: 2,
  timeUnitFs: 13_000,
  tickFs: 13_000,
};

const seen = (channels: readonly number[], loud?: number) =>
  proposeDetector({
    kind: 'tags',
    records: 1,
    first: [],
    channels: channels.map((channel) => ({ channel, count: channel === loud ? 100_000 : 50 })),
    sampled: 1,
    sampledSeconds: 1,
  });
const range = (from: number, to: number): number[] =>
  Array.from({ length: to - from + 1 }, (_, i) => from + i);

describe('the detector proposed from channels', () => {
  it('is two square arrays, also with dead pixels and from any first channel', () => {
    const whole = seen(range(0, 511))?.detector;
    expect(whole).toMatchObject({
      signal: { width: 16, height: 16, firstChannel: 0 },
      idler: { width: 16, height: 16, firstChannel: 256 },
    });
    expect(seen(range(0, 511).filter((c) => c % 9 !== 4))?.detector).toEqual(whole);
    expect(seen(range(100, 117))?.detector).toMatchObject({
      signal: { width: 3, firstChannel: 100 },
      idler: { width: 3, firstChannel: 109 },
    });
    expect(seen([4, 5])?.detector).toMatchObject({ signal: { width: 1 }, idler: { firstChannel: 5 } });
  });

  it('is two arrays where the channels lie in two runs, and one where they fill one square', () => {
    expect(seen([...range(100, 163), ...range(200, 263)])?.detector).toMatchObject({
      signal: { width: 8, height: 8, firstChannel: 100 },
      idler: { width: 8, height: 8, firstChannel: 200 },
    });
    const one = seen(range(0, 63))?.detector;
    expect(one).toMatchObject({ signal: { width: 8, height: 8, firstChannel: 0 } });
    expect(one).not.toHaveProperty('idler');
  });

  it('is a bucket and an array when one channel at an end is loud', () => {
    expect(seen(range(0, 256), 256)?.detector).toMatchObject({
      bucket: { channel: 256 },
      signal: { width: 16, firstChannel: 0 },
    });
    expect(seen(range(0, 64), 0)?.detector).toMatchObject({
      bucket: { channel: 0 },
      signal: { width: 8, firstChannel: 1 },
    });
  });

  it('is nothing when nothing fits', () => {
    expect(seen([3])).toBeNull();
    expect(seen([1, 90, 700])).toBeNull();
    expect(proposeDetector({ kind: 'none' })).toBeNull();
  });
});

describe('the reading dialog', () => {
  it('gives back the layout it was opened with', () => {
    const draft = draftReading(records, null, false, null, null);
    expect(draft.tickPs).toBe(10);
    expect(readLayout(draft)).toEqual({ layout: records, errors: {} });
  });

  it('says by the field what is missing or does not fit', () => {
    const draft = draftReading(records, null, false, null, null);
    const { layout, errors } = readLayout({
      ...draft,
      tickPs: null,
      timeBits: { firstBit: 20, bits: 21 },
      channelBits: { firstBit: null, bits: 10 },
    });
    expect(layout).toBeNull();
    expect(errors.tickPs).toContain('picoseconds');
    expect(errors.time).toBe('Bits 20 to 40 do not fit a record of 32 bits.');
    expect(errors.channel).toContain('where the channel begins');
    const empty = draftReading(null, null, false, null, inspectionOf('x'));
    expect(readLayout(empty).errors).toMatchObject({
      time: expect.stringContaining('dataset'),
      channel: expect.stringContaining('dataset'),
    });
  });

  const layouts: [string, Layout][] = [
    [
      'NumPy columns',
      {
        version: 1,
        format: 'npy',
        kind: 'tags',
        time: { field: 'stamp' },
        channel: { array: 'lines', field: 1 },
        tickFs: 81_000,
      },
    ],
    ['NumPy frames', { version: 1, format: 'npy', kind: 'frames', array: 'stack' }],
    ['the one array of a NumPy file', { version: 1, format: 'npy', kind: 'frames' }],
    ['TIFF', { version: 1, format: 'tiff', kind: 'frames' }],
    ['text in nanoseconds', { ...textLayout, timeUnitFs: 1e6 }],
    ['text in whole ticks', { ...textLayout, timeUnitFs: textLayout.tickFs }],
    ['text in a unit of its own', { ...textLayout, timeUnitFs: 12_500 }],
  ];
  it.each(layouts)('keeps a layout of %s through the form', (_name, layout) => {
    expect(readLayout(draftReading(layout, null, false, null, null))).toEqual({ layout, errors: {} });
  });

  it('says what is wrong in a text layout, and follows the tick where times are whole ticks', () => {
    const draft = draftReading(textLayout, null, false, null, null);
    expect(draft.timeUnit).toBe('tick');
    expect(readLayout({ ...draft, tickPs: 10 }).layout).toMatchObject({ tickFs: 10_000, timeUnitFs: 10_000 });
    expect(
      readLayout({
        ...draft,
        decimal: 'comma',
        headerLines: null,
        channelColumn: draft.timeColumn,
        timeUnit: 'other',
        otherUnitPs: null,
      }).errors,
    ).toEqual({
      decimal: 'A comma cannot both part the columns and mark the decimals.',
      headerLines: 'Write how many lines come before the first tag.',
      channelColumn: 'Times and channels cannot stand in one column.',
      timeUnit: 'Write how many picoseconds one unit of the time column is.',
    });
    const looked = { ...inspectionOf('x'), layout: null };
    expect(draftReading(null, null, false, null, { ...looked, reader: 'text' }).format).toBe('text');
    const npy = draftReading(null, null, false, null, { ...looked, reader: 'npy' });
    expect(readLayout({ ...npy, tickPs: 1 }).errors).toEqual({
      time: 'Choose the array that holds the times.',
      channel: 'Choose the array that holds the channels.',
    });
  });

  it('offers every integer column of the file', () => {
    const labels = columnOptions([
      ...inspectionOf('x').datasets,
      { path: '/pair', shape: [9, 2], type: 'int32', fields: [] },
      { path: '/real', shape: [9], type: 'float64', fields: [] },
      { path: '/stack', shape: [9, 4, 4], type: 'uint16', fields: [] },
    ]).map(({ label }) => label);
    expect(labels).toEqual([
      '/t',
      '/c',
      '/both · when',
      '/both · where',
      '/pair · column 0',
      '/pair · column 1',
    ]);
    expect(frameOptions([{ path: '/stack', shape: [9, 4, 4], type: 'uint16' }])).toHaveLength(1);
    expect(toArrayColumn({ dataset: '', field: 'stamp' })).toEqual({ field: 'stamp' });
    expect(toArrayColumn({ dataset: 'lines', field: 1 })).toEqual({ array: 'lines', field: 1 });
  });

  it('reads the detector map, its mask and its pitch', () => {
    const proposal = seen(range(0, 17))!.detector;
    const draft = draftReading(null, proposal, false, null, inspectionOf('x'));
    expect(draft.signal?.pitchUm).toBeNull();
    expect(readDetector(draft)).toMatchObject({ given: false, errors: {} });
    const calibrated = { ...draft, plane: { ...draft.plane, kind: 'near' as const } };
    expect(readDetector(calibrated).errors['signal.pitchUm']).toContain('pitch');
    const full = {
      ...draft,
      signal: { ...draft.signal!, pitchUm: 50, masked: '3, 8' },
      idler: { ...draft.idler!, pitchUm: 50, firstChannel: 5 },
    };
    expect(readDetector(full).errors['idler.firstChannel']).toContain('overlap');
    const good = readDetector({ ...full, idler: { ...full.idler, firstChannel: 9 } });
    expect(good).toMatchObject({ given: true, detector: { signal: { maskedPixels: [3, 8], pitchUm: 50 } } });
    const bad = readDetector({ ...full, signal: { ...full.signal, masked: '9' } });
    expect(bad.errors['signal.masked']).toBe('Pixels run from 0 to 8 (y × width + x).');
    expect(readPixels('1 2;3, 4')).toEqual([1, 2, 3, 4]);
    expect(readPixels('one')).toBeNull();
  });

  it('asks for every number of a calibration, with its uncertainty', () => {
    const draft = draftReading(null, null, false, null, inspectionOf('x'));
    expect(readPlane(draft)).toEqual({ plane: null, errors: {} });
    const far = { ...draft.plane, kind: 'far' as const, focalLengthMm: { value: 150, sigma: null } };
    const { errors } = readPlane({ ...draft, plane: far });
    expect(errors['plane.focalLengthMm']).toContain('uncertainty');
    expect(errors['plane.signalNm']).toBe('Write the value.');
    const near = { ...draft.plane, kind: 'near' as const, magnification: { value: 3, sigma: 0.03 } };
    expect(readPlane({ ...draft, plane: near }).plane).toEqual({
      version: 1,
      kind: 'near',
      magnification: { value: 3, sigma: 0.03 },
    });
  });
});
