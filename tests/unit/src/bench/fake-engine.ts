import type { DialSpec } from '../../../../shared/contracts/dial';
import type { Inspection, RunEvent, RunRequest, RunResult } from '../../../../shared/contracts/engine';
import type { Layout } from '../../../../shared/contracts/layout';
import type { Outcome } from '../../../../shared/contracts/outcome';
import type { MapData, StudyOutput } from '../../../../shared/contracts/output';
import type { StudyInfo } from '../../../../shared/contracts/study';
import type { EngineDoor } from '../../../../src/lib/workers/engine-door';

/** An engine that answers when the test says so. */

export const tagsLayout: Layout = {
  version: 1,
  format: 'hdf5',
  kind: 'tags',
  time: { dataset: '/t' },
  channel: { dataset: '/c' },
  tickFs: 1000,
};

export function inspectionOf(fileName: string, change: Partial<Inspection> = {}): Inspection {
  return {
    fileName,
    bytes: 80,
    layout: tagsLayout,
    because: 'Two integer datasets of the same length.',
    warnings: [],
    reader: 'h5wasm',
    facts: {
      kind: 'tags',
      records: 1000,
      first: [{ tick: '12', channel: 3 }],
      channels: Array.from({ length: 8 }, (_, channel) => ({ channel, count: 100 + channel })),
      sampled: 1000,
      sampledSeconds: 2,
    },
    datasets: [
      { path: '/t', shape: [1000], type: 'uint64', fields: [] },
      { path: '/c', shape: [1000], type: 'uint16', fields: [] },
      { path: '/both', shape: [1000], type: 'compound{when:uint64,where:uint16}', fields: ['when', 'where'] },
    ],
    ...change,
  };
}

export const delayInfo: StudyInfo = {
  id: 'delay',
  label: 'Delay',
  answers: 'Which clicks are real coincidences?',
  inputs: [{ name: 'tags', label: 'Time tags', accepts: ['tags'], arms: ['signal', 'idler'], plane: 'none' }],
  dials: [
    {
      id: 'window',
      label: 'Coincidence window',
      reason: 'Full width.',
      needs: 'bytes',
      type: 'number',
      unit: 'ps',
      default: null,
      min: 1,
      max: 1e6,
      step: 10,
      auto: true,
    },
    {
      id: 'delay',
      label: 'Delay',
      reason: 'Centre.',
      needs: 'bytes',
      type: 'number',
      unit: 'ps',
      default: null,
      min: -1e6,
      max: 1e6,
      step: 10,
      auto: true,
    },
  ],
};

/** A dial of any study that only finishes anew. */
export const finishDial: DialSpec = {
  id: 'resamples',
  label: 'Resamples',
  reason: 'How often.',
  needs: 'finish',
  type: 'integer',
  unit: '',
  default: 1000,
  min: 100,
  max: 10_000,
  step: 100,
  auto: false,
};

export const witnessInfo: StudyInfo = {
  id: 'witness',
  label: 'Witness',
  answers: 'Is a bound broken?',
  inputs: (['near', 'far'] as const).map((plane) => ({
    name: plane,
    label: `The ${plane} field`,
    accepts: ['tags', 'frames'],
    arms: ['signal', 'idler'],
    plane,
  })),
  dials: [],
};

export function histogram(): MapData {
  const data = Float64Array.from({ length: 400 }, (_, i) => (Math.abs(i - 200) < 5 ? 100 : 2));
  return {
    label: 'Delay histogram',
    shape: [400],
    axes: [{ label: 'delay', unit: 'ns', start: -20, step: 0.1 }],
    unit: 'pairs',
    scale: 'counts',
    data,
  };
}

export function outputOf(change: Partial<StudyOutput> = {}): StudyOutput {
  return {
    study: 'delay',
    quantities: {
      'coincidences.raw': { value: 1234.8, sigma: 6, unit: '1/s', method: 'Poisson', n: 40_000 },
      'coincidences.net': { value: 1200.2, sigma: 7, unit: '1/s', method: 'Poisson', n: 40_000 },
      'delay.peak': { value: 23_702.3, sigma: 1.6, unit: 'ps', method: 'Gaussian fit', n: 24_765 },
    },
    verdicts: {},
    checks: [{ id: 'pairs-enough', status: 'caution', figure: 12, unit: 'pairs', sentence: 'Few pairs.' }],
    maps: { 'delay.histogram': histogram() },
    chosen: { window: 1000, delay: 0 },
    statement: 'Counted in a window.',
    ...change,
  };
}

export function resultOf(output: StudyOutput, request: RunRequest): RunResult {
  return {
    output,
    provenance: {
      inputs: Object.entries(request.inputs).map(([name, { source, layout, detector, plane }]) => ({
        name,
        fileName: source.name,
        sha256: 'ab'.repeat(32),
        bytes: source.size,
        layout,
        detector,
        plane,
      })),
      dials: request.dials,
      engine: '0.1.0',
      seed: request.seed,
      startedAt: '2026-01-02T03:04:05.000Z',
      seconds: 1.5,
    },
  };
}

export interface FakeRun {
  request: RunRequest;
  tell(event: RunEvent): void;
  answer(outcome: Outcome<RunResult>): void;
}

export interface FakeEngine extends EngineDoor {
  runs: FakeRun[];
  cancelled: string[];
  looks: { name: string; layout: Layout | null }[];
  inspection(name: string, layout: Layout | null): Outcome<Inspection>;
}

export function fakeEngine(): FakeEngine {
  const engine: FakeEngine = {
    runs: [],
    cancelled: [],
    looks: [],
    inspection: (name) => ({ status: 'ok', value: inspectionOf(name) }),
    studies: async () => ({ status: 'ok', value: [delayInfo, witnessInfo] }),
    inspect: async ({ name }, layout) => {
      engine.looks.push({ name, layout });
      return engine.inspection(name, layout);
    },
    run: (request, tell) =>
      new Promise((answer) => {
        engine.runs.push({ request, tell, answer });
      }),
    cancel: (jobId) => {
      engine.cancelled.push(jobId);
    },
    restart: () => undefined,
  };
  return engine;
}

export function fileOf(name: string, size = 80): File {
  return new File([new Uint8Array(size)], name);
}

/** Lets every answered promise be taken up. */
export async function settle(): Promise<void> {
  for (let i = 0; i < 8; i++) await Promise.resolve();
}
