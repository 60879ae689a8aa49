import { describe, expect, it } from 'vitest';
import { detectorSchema } from '../../../../../shared/contracts/detector';
import type { DialSpec } from '../../../../../shared/contracts/dial';
import { layoutSchema } from '../../../../../shared/contracts/layout';
import {
  describeDetector,
  describeLayout,
  describePlane,
} from '../../../../../src/components/output/input-words';
import { describeDials } from '../../../../../src/features/presets/model/describe-dial';
import { listDifferences } from '../../../../../src/features/presets/model/differences';
import { layout, near, preset } from '../../app/fixtures';

const specs: DialSpec[] = [
  {
    id: 'window',
    label: 'Coincidence window',
    reason: 'Wider keeps more.',
    needs: 'finish',
    type: 'number',
    unit: 'ps',
    default: null,
    min: 1,
    max: 1e6,
    step: 1,
    auto: true,
  },
  {
    id: 'method',
    label: 'Accidentals from',
    reason: 'How.',
    needs: 'finish',
    type: 'choice',
    options: [{ value: 'shifted', label: 'shifted windows' }],
    default: 'shifted',
  },
];

describe('dials in words', () => {
  it('gives value, unit and choice, marks what the preset sets, and hides nothing', () => {
    const dials = describeDials({ window: 1400, later: { x0: 1, y0: 2, x1: 3, y1: 4 } }, specs);
    expect(dials.map(({ label, value, changed }) => [label, value, changed])).toEqual([
      ['Coincidence window', '1400 ps', true],
      ['Accidentals from', 'shifted windows', false],
      ['later', 'pixels 1 to 3 by 2 to 4', false],
    ]);
    expect(describeDials({}, specs)[0]?.value).toBe('chosen by the study');
  });
});

describe('inputs in words', () => {
  it('says how tags lie in datasets and in records', () => {
    expect(describeLayout(layout).join('; ')).toBe(
      'time tags in HDF5 datasets; time in /tags/time; channel in /tags/channel; tick 10 ps',
    );
    const records = layoutSchema.parse({
      version: 1,
      format: 'records',
      kind: 'tags',
      recordBytes: 4,
      byteOrder: 'little',
      headerBytes: 64,
      time: { firstBit: 0, bits: 25 },
      channel: { firstBit: 31, bits: 1 },
      rollover: { in: 'wrap' },
      tickFs: 1000,
    });
    expect(describeLayout(records)).toEqual([
      'time tags in records of 4 bytes, little-endian',
      'after a header of 64 bytes',
      'time in bits 0 to 24, channel in bit 31',
      'tick 1 ps, time wraps at its range',
    ]);
  });

  it('says how text, NumPy arrays and TIFF pages are read', () => {
    const text = layoutSchema.parse({
      version: 1,
      format: 'text',
      kind: 'tags',
      delimiter: 'semicolon',
      decimal: 'comma',
      headerLines: 2,
      timeColumn: 1,
      channelColumn: 0,
      timeUnitFs: 1e6,
      tickFs: 1000,
    });
    expect(describeLayout(text)).toEqual([
      'time tags in lines of text, semicolons between columns, decimal comma',
      'after 2 header lines',
      'time in column 2 in ns, channel in column 1',
      'tick 1 ps',
    ]);
    const npy = layoutSchema.parse({
      version: 1,
      format: 'npy',
      kind: 'tags',
      time: { field: 'stamp' },
      channel: { array: 'lines', field: 1 },
      tickFs: 81_000,
    });
    expect(describeLayout(npy)).toEqual([
      'time tags in NumPy arrays',
      'time in field stamp',
      'channel in lines, column 1',
      'tick 81 ps',
    ]);
    expect(describeLayout({ version: 1, format: 'npy', kind: 'frames' })).toEqual([
      'frames in a NumPy array',
    ]);
    expect(describeLayout({ version: 1, format: 'tiff', kind: 'frames' })).toEqual([
      'frames in the pages of a TIFF file',
    ]);
  });

  it('says what the detector map and the plane hold', () => {
    const detector = detectorSchema.parse({
      version: 1,
      kind: 'tags',
      idler: { width: 4, height: 2, firstChannel: 8, pitchUm: 50, flipX: true, maskedPixels: [1] },
      bucket: { channel: 3 },
    });
    expect(describeDetector(detector)).toEqual([
      'idler 4 × 2, channels 8 to 15 by rows, pitch 50 µm, x flipped, 1 masked',
      'bucket on channel 3',
    ]);
    expect(describePlane(near)).toEqual(['near field, magnification 4.00(4)']);
  });
});

describe('differences between two versions', () => {
  it('lists dials with their values and inputs by name, and nothing for the same preset', () => {
    expect(listDifferences(preset, preset, specs)).toEqual([]);
    const { tags } = preset.inputs;
    const after = {
      ...preset,
      dials: { method: 'shifted' },
      inputs: { tags: { ...tags!, plane: null, layout: { ...layout, tickFs: 1000 } } },
    };
    expect(listDifferences(preset, after, specs)).toEqual([
      { what: 'Coincidence window', before: '1400 ps', after: 'chosen by the study' },
      { what: 'tags: layout', before: 'given', after: 'given anew' },
      { what: 'tags: plane', before: 'given', after: 'none' },
    ]);
    const detector = detectorSchema.parse({ version: 1, kind: 'frames', pitchUm: 16 });
    const mapped = { ...preset, inputs: { tags: { ...tags!, detector } } };
    expect(listDifferences(preset, mapped, specs).map(({ what }) => what)).toEqual(['tags: detector map']);
  });
});
