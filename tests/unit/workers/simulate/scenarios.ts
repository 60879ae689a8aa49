import type { FrameScenario, TagScenario } from '../../../../shared/contracts/scenario';
import { parseScenario } from '../../../../workers/simulate/scenario';

export const source = {
  pumpNm: 405,
  pumpWaistUm: 75,
  crystalMm: 5,
  pumpIndex: 1.66,
  alpha: 0.455,
  signalNm: 810,
  idlerNm: 810,
};

export function arrayAt(firstChannel: number, change: object = {}): object {
  return { kind: 'array', efficiency: 0.2, width: 16, height: 16, pitchUm: 50, firstChannel, ...change };
}

export const plainTags = {
  version: 1,
  kind: 'tags',
  name: 'plain',
  seed: 1,
  source,
  optics: { kind: 'near', magnification: 4 },
  seconds: 0.1,
  tickFs: 10_000,
  pairsPerSecond: 1e6,
  signal: arrayAt(0),
  idler: arrayAt(256),
};

export const plainFrames = {
  version: 1,
  kind: 'frames',
  name: 'plain frames',
  seed: 1,
  source,
  optics: { kind: 'far', focalLengthMm: 22 },
  frames: 500,
  pairsPerFrame: 20,
  camera: {
    width: 48,
    height: 48,
    pitchUm: 16,
    signalEfficiency: 0.5,
    idlerEfficiency: 0.4,
    readout: { kind: 'counts' },
  },
};

export function tagScenario(change: object = {}): TagScenario {
  const scenario = parseScenario({ ...plainTags, ...change });
  if (scenario.kind !== 'tags') throw new Error('a tag scenario was expected');
  return scenario;
}

export function frameScenario(change: object = {}, camera: object = {}): FrameScenario {
  const scenario = parseScenario({
    ...plainFrames,
    ...change,
    camera: { ...plainFrames.camera, ...camera },
  });
  if (scenario.kind !== 'frames') throw new Error('a frame scenario was expected');
  return scenario;
}
