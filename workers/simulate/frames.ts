import type { FrameBlock } from '../../shared/contracts/blocks';
import type { FrameScenario } from '../../shared/contracts/scenario';
import { createRandom } from '../../shared/util/random';
import { neighbourOf } from './clicks';
import { axisLaw, drawPair, type PairPosition } from './pair-source';
import { binAt } from './receivers';

/** Pixels as the file's type holds them. */
export interface SimulatedFrameBlock extends FrameBlock {
  pixels: Uint8Array | Uint16Array;
}

/**
 * Camera frames of a scenario: per frame a Poisson number of pairs, both photons on the same camera, each turned into an
 * electron with its arm's efficiency; dark electrons; charge that smears to a neighbour; then read noise and read-out.
 */
export function* simulateFrames(scenario: FrameScenario, blockFrames = 256): Generator<SimulatedFrameBlock> {
  const { camera } = scenario;
  const frameSize = camera.width * camera.height;
  const expose = createExposure(scenario);
  const charge = new Float64Array(frameSize);
  for (let first = 0; first < scenario.frames; first += blockFrames) {
    const count = Math.min(blockFrames, scenario.frames - first);
    const length = count * frameSize;
    const pixels = scenario.file.type === 'uint8' ? new Uint8Array(length) : new Uint16Array(length);
    for (let i = 0; i < count; i++) {
      expose(first + i, charge, pixels.subarray(i * frameSize, (i + 1) * frameSize));
    }
    yield {
      kind: 'frames',
      firstFrame: first,
      count,
      width: camera.width,
      height: camera.height,
      pixels,
      bytes: pixels.byteLength,
    };
  }
}

type Expose = (frame: number, charge: Float64Array, into: Uint8Array | Uint16Array) => void;

function createExposure(scenario: FrameScenario): Expose {
  const { camera, drift } = scenario;
  const { width, height, pitchUm, smear } = camera;
  const frameSize = width * height;
  const side = pitchUm * Math.sqrt(camera.fill);
  const [axisX, axisY] = camera.axisUm;
  const random = createRandom(scenario.seed);
  const law = axisLaw(scenario.source, scenario.optics);
  const position: PairPosition = [0, 0, 0, 0];
  const readOut = createReadOut(scenario, random.normal);

  const addElectron = (charge: Float64Array, pixel: number): void => {
    charge[pixel]! += 1;
    if (smear > 0 && random.uniform() < smear) {
      const neighbour = neighbourOf(pixel, width, frameSize, random.below(4));
      if (neighbour >= 0) charge[neighbour]! += 1;
    }
  };
  const land = (charge: Float64Array, xUm: number, yUm: number): void => {
    const x = binAt(xUm, width, pitchUm, side, axisX);
    const y = binAt(yUm, height, pitchUm, side, axisY);
    if (x >= 0 && y >= 0) addElectron(charge, y * width + x);
  };

  return (frame, charge, into) => {
    charge.fill(0);
    const strength = 1 + drift * ((frame + 0.5) / scenario.frames - 0.5);
    const pairs = random.poisson(scenario.pairsPerFrame * strength);
    for (let i = 0; i < pairs; i++) {
      drawPair(law, random, position);
      if (random.uniform() < camera.signalEfficiency) land(charge, position[0], position[1]);
      if (random.uniform() < camera.idlerEfficiency) land(charge, position[2], position[3]);
    }
    const darks = random.poisson(camera.darksPerPixel * frameSize);
    for (let i = 0; i < darks; i++) addElectron(charge, random.below(frameSize));
    readOut(charge, into);
  };
}

function createReadOut(
  scenario: FrameScenario,
  normal: () => number,
): (charge: Float64Array, into: Uint8Array | Uint16Array) => void {
  const { readout } = scenario.camera;
  const noise = readout.readNoise;
  if (readout.kind === 'clicks') {
    return (charge, into) => {
      for (let i = 0; i < charge.length; i++) {
        const seen = noise === 0 ? charge[i]! : charge[i]! + noise * normal();
        into[i] = seen > readout.threshold ? 1 : 0;
      }
    };
  }
  const top = scenario.file.type === 'uint8' ? 255 : 65535;
  return (charge, into) => {
    for (let i = 0; i < charge.length; i++) {
      const seen = noise === 0 ? charge[i]! : charge[i]! + noise * normal();
      into[i] = Math.min(top, Math.max(0, Math.round(readout.offset + readout.gain * seen)));
    }
  };
}
