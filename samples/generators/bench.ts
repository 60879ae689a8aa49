import type { FrameScenario, Scenario, TagScenario } from '../../shared/contracts/scenario';
import { parseScenario } from '../../workers/simulate/scenario';

/** The Lanternfield pair bench: an invented set-up, the same in every sample. */

export const TICK_FS = 10_000;
export const SIGNAL_CHANNEL = 0;
export const IDLER_CHANNEL = 256;
export const BUCKET_CHANNEL = 512;
export const ARRAY_SIDE = 16;
export const ARRAY_PITCH_UM = 50;
export const CAMERA_PITCH_UM = 16;
/** Idler pixel with far too many dark counts; the presets mask it. */
export const HOT_IDLER_PIXEL = 37;

const source = {
  pumpNm: 405,
  pumpWaistUm: 75,
  crystalMm: 5,
  pumpIndex: 1.66,
  alpha: 0.455,
  signalNm: 810,
  idlerNm: 810,
};

export const optics = {
  near: { kind: 'near', magnification: 4 },
  far: { kind: 'far', focalLengthMm: 22 },
} as const;

const timing = {
  efficiency: 0.12,
  jitterPs: 247,
  deadTimeNs: 50,
  darksPerSecond: 100,
  backgroundPerSecond: 5000,
};

const array = {
  kind: 'array',
  ...timing,
  width: ARRAY_SIDE,
  height: ARRAY_SIDE,
  pitchUm: ARRAY_PITCH_UM,
  skewPs: 40,
  crosstalk: 0.002,
};
const signal = { ...array, firstChannel: SIGNAL_CHANNEL };
const idler = {
  ...array,
  firstChannel: IDLER_CHANNEL,
  /** The idler's cable is the longer one. */
  delayPs: 23_700,
  hotPixels: [{ pixel: HOT_IDLER_PIXEL, perSecond: 20_000 }],
};

/** A lantern: ring, cap, glass with a flame, foot. */
const lantern = [
  '################',
  '######....######',
  '######.##.######',
  '######....######',
  '####........####',
  '####........####',
  '################',
  '####..####..####',
  '####..#..#..####',
  '####..#..#..####',
  '####..#..#..####',
  '####..####..####',
  '################',
  '###..........###',
  '###..........###',
  '################',
];

const bucket = {
  kind: 'bucket',
  ...timing,
  efficiency: 0.2,
  channel: BUCKET_CHANNEL,
  stencil: { cellUm: ARRAY_PITCH_UM, rows: lantern },
};

interface TagRun {
  name: string;
  seed: number;
  seconds: number;
  optics: TagScenario['optics'];
  file?: Partial<TagScenario['file']>;
}

export function tagRun(
  { name, seed, seconds, optics, file = {} }: TagRun,
  behindStencil = false,
): TagScenario {
  return parsed('tags', {
    version: 1,
    kind: 'tags',
    name,
    seed,
    source,
    optics,
    seconds,
    tickFs: TICK_FS,
    pairsPerSecond: 5e6,
    signal: behindStencil ? bucket : signal,
    idler,
    file,
  });
}

interface FrameRun {
  name: string;
  seed: number;
  frames: number;
  side: number;
  optics: FrameScenario['optics'];
  file?: Partial<FrameScenario['file']>;
}

export function frameRun({ name, seed, frames, side, optics, file = {} }: FrameRun): FrameScenario {
  return parsed('frames', {
    version: 1,
    kind: 'frames',
    name,
    seed,
    source,
    optics,
    frames,
    pairsPerFrame: 24,
    camera: {
      width: side,
      height: side,
      pitchUm: CAMERA_PITCH_UM,
      signalEfficiency: 0.5,
      idlerEfficiency: 0.5,
      darksPerPixel: 0.002,
      smear: 0.01,
      readout: { kind: 'clicks', readNoise: 0.08, threshold: 0.5 },
    },
    file,
  });
}

function parsed<K extends Scenario['kind']>(kind: K, value: unknown): Extract<Scenario, { kind: K }> {
  const scenario = parseScenario(value);
  if (scenario.kind !== kind) throw new Error(`A ${kind} scenario was expected.`);
  return scenario as Extract<Scenario, { kind: K }>;
}
