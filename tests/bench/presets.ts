import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import type { Layout } from '../../shared/contracts/layout';
import { type Preset, presetSchema } from '../../shared/contracts/preset';

/** Layout of the files that `long_records` in tests/bench/numpy/make_data.py writes. */
export const longRecords: Layout = {
  version: 1,
  format: 'records',
  kind: 'tags',
  recordBytes: 8,
  byteOrder: 'little',
  headerBytes: 0,
  time: { firstBit: 0, bits: 40 },
  channel: { firstBit: 40, bits: 16 },
  rollover: {
    in: 'marker',
    when: [{ field: { firstBit: 63, bits: 1 }, equals: 1 }],
    advanceTick: 2 ** 40,
    wraps: 'one',
  },
  skip: [],
  tickFs: 1000,
};

/** A preset of the samples; where `layout` is given all its inputs are read by it. */
export function samplePreset(file: string, layout: Layout | null): Preset {
  const path = fileURLToPath(new URL(`../../samples/presets/${file}`, import.meta.url));
  const preset = presetSchema.parse(JSON.parse(readFileSync(path, 'utf8')));
  if (layout === null) return preset;
  const inputs = Object.fromEntries(
    Object.entries(preset.inputs).map(([name, input]) => [name, { ...input, layout }]),
  );
  return { ...preset, inputs };
}
