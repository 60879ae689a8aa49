import type { Me, PresetRow, ResultRow, ResultSummary, Samples } from '../../../../shared/contracts/http';
import { presetSchema } from '../../../../shared/contracts/preset';
import { type ResultFile, resultFileSchema } from '../../../../shared/contracts/result';
import { encodeMap } from '../../../../shared/contracts/result-codec';

export const HASH = 'ab'.repeat(32);

export function meOf(role: Me['groups'][number]['role']): Me {
  return {
    user: { id: 'u1', name: 'Invented Person', email: 'person@demo.gemel' },
    groups: [{ id: 'g1', name: 'Lanternfield', role }],
  };
}

const stamp = {
  createdAt: '2026-03-04T20:42:00.000Z',
  updatedAt: '2026-03-04T20:42:00.000Z',
  by: 'Invented Person',
  byId: 'u1',
};

export const near = { version: 1, kind: 'near', magnification: { value: 4, sigma: 0.04 } } as const;
export const layout = {
  version: 1,
  format: 'hdf5',
  kind: 'tags',
  time: { dataset: '/tags/time' },
  channel: { dataset: '/tags/channel' },
  tickFs: 10_000,
} as const;
const array = { width: 16, height: 16, firstChannel: 0, pitchUm: 50 };

export const preset = presetSchema.parse({
  gemel: 1,
  kind: 'preset',
  name: 'Lantern delay',
  study: 'delay',
  dials: { window: 1400 },
  inputs: { tags: { layout, detector: { version: 1, kind: 'tags', signal: array }, plane: near } },
});

export const presetRow: PresetRow = {
  ...stamp,
  id: 'p1',
  name: preset.name,
  study: preset.study,
  version: 2,
  preset,
};

export const inlineMap = encodeMap({
  label: 'Delay histogram',
  shape: [4],
  axes: [{ label: 'delay', unit: 'ns', start: -3, step: 2 }],
  unit: 'pairs',
  scale: 'counts',
  data: Float64Array.of(3, 40, 38, 2),
});

const { data: _data, ...mapHead } = inlineMap;
export const mapPath = `/api/groups/g1/maps/${HASH}`;

export const resultFile: ResultFile = resultFileSchema.parse({
  gemel: 1,
  study: 'delay',
  quantities: { car: { value: 31.24, sigma: 0.4, unit: '1', method: 'block bootstrap, 64 blocks', n: 1200 } },
  verdicts: {},
  checks: [{ id: 'pairs-enough', status: 'pass', figure: 1200, unit: 'pairs', sentence: 'Enough pairs.' }],
  maps: { 'delay.histogram': { ...mapHead, file: mapPath } },
  chosen: { window: 1400, delay: 0 },
  statement: 'Coincidences were counted in a window of 1400 ps.',
  provenance: {
    inputs: [
      {
        name: 'tags',
        fileName: 'near-tags.h5',
        sha256: HASH,
        bytes: 2_000_000,
        layout,
        detector: { version: 1, kind: 'tags', signal: array },
        plane: near,
      },
    ],
    preset: { name: preset.name, version: 1 },
    dials: { window: null },
    engine: '0.1.0',
    seed: 1,
    startedAt: '2026-03-04T20:40:00.000Z',
    seconds: 0.9,
  },
});

export const resultRow: ResultRow = {
  ...stamp,
  id: 'r1',
  name: 'Night run',
  study: 'delay',
  result: resultFile,
};

export function summary(change: Partial<ResultSummary>): ResultSummary {
  return {
    ...stamp,
    id: 'r1',
    name: 'Night run',
    study: 'delay',
    headline: [{ id: 'coincidences.net', value: 1234.5, sigma: 3.1, unit: '1/s' }],
    ...change,
  };
}

export const samples: Samples = {
  scenario: 'An invented bench.',
  files: [
    { file: 'near.h5', bytes: 2_000_000, sha256: HASH, shows: 'Born at the same place.' },
    { file: 'far.h5', bytes: 1_000_000, sha256: HASH, shows: 'Opposite momenta.' },
  ],
  presets: [
    { preset, files: { tags: 'near.h5' } },
    {
      preset: {
        ...preset,
        name: 'Witness from frames',
        study: 'witness',
        inputs: {
          near: {
            layout: null,
            detector: { version: 1, kind: 'frames', pitchUm: 16, maskedPixels: [] },
            plane: null,
          },
        },
      },
      files: { near: 'near.h5', far: 'far.h5' },
    },
    {
      preset: { ...preset, name: 'Witness from tags', study: 'witness' },
      files: { near: 'near.h5', far: 'far.h5' },
    },
  ],
};
