import type { BenchState } from '../../shared/contracts/http';
import type { Preset } from '../../shared/contracts/preset';
import type { MapFile, ResultFile } from '../../shared/contracts/result';

export function makePreset(name = 'Evening run'): Preset {
  return { gemel: 1, kind: 'preset', name, study: 'delay', dials: { window: 400.25 }, inputs: {} };
}

export function makeState(): BenchState {
  return {
    version: 1,
    study: 'delay',
    preset: makePreset(),
    shelf: [{ name: 'run.bin', bytes: 800, sha256: 'a'.repeat(64), input: 'tags', sample: null }],
    seed: 7,
    resultId: null,
  };
}

export function float64Base64(values: readonly number[]): string {
  return Buffer.from(Float64Array.from(values).buffer).toString('base64');
}

export function makeMap(values: readonly number[] = [1, 2.5, Number.NaN, 1e-300]): MapFile {
  return {
    label: 'Joint map',
    shape: [values.length / 2, 2],
    axes: [
      { label: 'x signal', unit: 'um', start: 0.1 + 0.2, step: 50, arm: 'signal' },
      { label: 'x idler', unit: 'um', start: -1e-300, step: 12345.678901234567, arm: 'idler' },
    ],
    unit: 'pairs',
    scale: 'counts',
    data: float64Base64(values),
    masked: Buffer.from(new Uint8Array(values.length)).toString('base64'),
    sigma: float64Base64(values.map(() => 0.5)),
  };
}

/** Values that show whether a store keeps doubles: shortest text of each needs up to 17 digits or a large exponent. */
export const hardNumbers = {
  sum: 0.1 + 0.2,
  tiny: 1e-300,
  long: 12345.678901234567,
  smallest: Number.MIN_VALUE,
  largest: Number.MAX_VALUE,
  unsafe: 2 ** 53 + 2,
  negative: -1 / 3,
};

export function makeResult(maps: Record<string, MapFile> = { 'joint.x': makeMap() }): ResultFile {
  const quantities: ResultFile['quantities'] = {};
  for (const [id, value] of Object.entries(hardNumbers)) {
    quantities[id] = { value, sigma: Math.abs(value) / 3, unit: '1', method: 'given', n: 10 };
  }
  quantities.car = { value: 41.5, sigma: 0.5, unit: '1', method: 'counting', n: 1000 };
  return {
    gemel: 1,
    study: 'delay',
    quantities,
    verdicts: {},
    checks: [{ id: 'pairs-enough', status: 'pass', figure: 1000, unit: 'pairs', sentence: 'Enough pairs.' }],
    maps,
    chosen: { 'window.width': 400.1 },
    statement: 'Seen \u0000 τ', // a zero byte in prose must not break the store
    provenance: {
      inputs: [
        {
          name: 'tags',
          fileName: 'run.bin',
          sha256: 'b'.repeat(64),
          bytes: 800,
          layout: { version: 1, format: 'hdf5', kind: 'frames', dataset: '/frames' },
          detector: { version: 1, kind: 'frames', pitchUm: 13, maskedPixels: [] },
          plane: null,
        },
      ],
      preset: null,
      dials: { window: 400.25 },
      engine: '0.1.0',
      seed: 1,
      startedAt: '2026-01-01T00:00:00.000Z',
      seconds: 0.25,
    },
  };
}
