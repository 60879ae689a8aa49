import type { Receiver, Scenario, TagScenario } from '../../shared/contracts/scenario';
import { manciniProduct, reidProduct, schmidtNumber } from '../../shared/physics/double-gaussian';
import { axisLaw, pairLaw } from './pair-source';
import { jointMoments, type PixelLaw, pixelLaw } from './pixel-law';
import { type Bins, binsOf, columnsOf, evenBins, openCells, rowsOf } from './receivers';
import { noisePerSecond } from './tags';

/** Standard deviations on one axis, um in the crystal (near) or 1/mm (far). */
export interface WidthTruth {
  single: number;
  minus: number;
  plus: number;
  /** sigma of one photon's coordinate, the other's known. */
  conditional: number;
}

export interface AxisTruth {
  /** The double Gaussian itself. */
  ideal: WidthTruth;
  /** With the uniform law of the active pixel side added: a^2/12 a coordinate, a^2/6 a difference or sum. */
  blurred: WidthTruth;
  /** Second moments over pixel centres of the pairs that the arrays catch: blur and edges of the field included, exactly. */
  recorded: Omit<WidthTruth, 'single'>;
  pixels: PixelLaw;
}

export interface PairTruth {
  unit: 'um' | '1/mm';
  /** sigma(x1 - x2) in the crystal, um, and w/d. */
  birthUm: number;
  ratio: number;
  /** Of the pure state, per axis: r^2/(1+r^2)^2, 1/r^2 and (r + 1/r)/2. */
  reid: number;
  mancini: number;
  schmidt: number;
  x: AxisTruth;
  y: AxisTruth;
}

/** What a perfect analysis of a scenario would find, in closed form or by quadrature. */
export function truthOf(scenario: Scenario): PairTruth {
  const { birthUm, ratio } = pairLaw(scenario.source);
  return {
    unit: scenario.optics.kind === 'near' ? 'um' : '1/mm',
    birthUm,
    ratio,
    reid: reidProduct(ratio),
    mancini: manciniProduct(ratio),
    schmidt: schmidtNumber(ratio),
    x: axisTruth(scenario, 'x'),
    y: axisTruth(scenario, 'y'),
  };
}

function axisTruth(scenario: Scenario, axis: 'x' | 'y'): AxisTruth {
  const law = axisLaw(scenario.source, scenario.optics);
  const { signal, idler } = axisBins(scenario, axis);
  const unit = scenario.optics.kind === 'near' ? 1 : 1000;
  const mean = law.sigmaMean ** 2;
  const half = law.sigmaHalf ** 2;
  // Minus is m's partner: x1 - x2 = 2 h, x1 + x2 = 2 m.
  const widths = (blurSignal: number, blurIdler: number): WidthTruth => {
    const one = mean + half + blurSignal;
    const other = mean + half + blurIdler;
    return {
      single: unit * Math.sqrt(one),
      minus: unit * Math.sqrt(4 * half + blurSignal + blurIdler),
      plus: unit * Math.sqrt(4 * mean + blurSignal + blurIdler),
      conditional: unit * Math.sqrt(one - (mean - half) ** 2 / other),
    };
  };
  const blur = (bins: Bins, scale: number): number => ((bins.high[0]! - bins.low[0]!) / scale) ** 2 / 12;
  const pixels = pixelLaw(law, signal, idler);
  const centres = (bins: Bins, scale: number): Float64Array =>
    bins.low.map((low, i) => ((low + bins.high[i]!) / 2 / scale) * unit);
  const moments = jointMoments(
    pixels.joint,
    centres(signal, law.scaleSignal),
    centres(idler, law.scaleIdler),
  );
  return {
    ideal: widths(0, 0),
    blurred: widths(blur(signal, law.scaleSignal), blur(idler, law.scaleIdler)),
    recorded: {
      minus: Math.sqrt(moments.minus),
      plus: Math.sqrt(moments.plus),
      conditional: Math.sqrt(moments.conditional),
    },
    pixels,
  };
}

function axisBins(scenario: Scenario, axis: 'x' | 'y'): { signal: Bins; idler: Bins } {
  if (scenario.kind === 'tags') {
    return { signal: binsOf(scenario.signal, axis), idler: binsOf(scenario.idler, axis) };
  }
  const { camera } = scenario;
  const bins = evenBins(
    axis === 'x' ? camera.width : camera.height,
    camera.pitchUm,
    camera.pitchUm * Math.sqrt(camera.fill),
    camera.axisUm[axis === 'x' ? 0 : 1],
  );
  return { signal: bins, idler: bins };
}

export interface RateTruth {
  /** Tags per second of each arm, and pairs with both photons tagged; before dead time, crosstalk and afterpulses. */
  signal: number;
  idler: number;
  pairs: number;
  /** Chance that the arm's photon is tagged when the other arm's was. */
  heraldingSignal: number;
  heraldingIdler: number;
  /** Pairs per second with the idler in each cell (row-major): the ghost image where the signal arm is a bucket. */
  idlerImage: Float64Array;
}

export function ratesOf(scenario: TagScenario): RateTruth {
  const { signal, idler, pairsPerSecond } = scenario;
  const truth = truthOf(scenario);
  const seenSignal =
    pairsPerSecond * signal.efficiency * landing(signal, truth.x.pixels.signal, truth.y.pixels.signal);
  const seenIdler =
    pairsPerSecond * idler.efficiency * landing(idler, truth.x.pixels.idler, truth.y.pixels.idler);
  const both = pairsPerSecond * signal.efficiency * idler.efficiency;
  const idlerImage = landingImage(scenario, truth).map((chance) => chance * both);
  const pairs = idlerImage.reduce((sum, rate) => sum + rate, 0);
  return {
    signal: seenSignal + darksOf(signal),
    idler: seenIdler + darksOf(idler),
    pairs,
    heraldingSignal: pairs / seenIdler,
    heraldingIdler: pairs / seenSignal,
    idlerImage,
  };
}

function darksOf(receiver: Receiver): number {
  if (receiver.kind === 'bucket') return noisePerSecond(receiver);
  const alive = openCells(receiver);
  const share = alive.reduce((sum, open) => sum + open, 0) / alive.length;
  const hot = receiver.hotPixels.reduce((sum, { pixel, perSecond }) => sum + alive[pixel]! * perSecond, 0);
  return noisePerSecond(receiver) * share + hot;
}

function landing(receiver: Receiver, alongX: Float64Array, alongY: Float64Array): number {
  const open = openCells(receiver);
  let chance = 0;
  alongY.forEach((py, y) => {
    alongX.forEach((px, x) => {
      chance += open[y * alongX.length + x]! * px * py;
    });
  });
  return chance;
}

/** Chance that a pair has its idler in each idler cell and its signal in any open signal cell. */
function landingImage(scenario: TagScenario, truth: PairTruth): Float64Array {
  const { signal, idler } = scenario;
  const open = openCells(signal);
  const [sx, sy, ix, iy] = [columnsOf(signal), rowsOf(signal), columnsOf(idler), rowsOf(idler)];
  const image = new Float64Array(ix * iy);
  const idlerOpen = openCells(idler);
  for (let y = 0; y < iy; y++) {
    // Per signal column: chance along y with the open rows of that column.
    const column = new Float64Array(sx);
    for (let b = 0; b < sy; b++) {
      for (let a = 0; a < sx; a++) column[a]! += open[b * sx + a]! * truth.y.pixels.joint[y * sy + b]!;
    }
    for (let x = 0; x < ix; x++) {
      let chance = 0;
      for (let a = 0; a < sx; a++) chance += column[a]! * truth.x.pixels.joint[x * sx + a]!;
      image[y * ix + x] = idlerOpen[y * ix + x]! * chance;
    }
  }
  return image;
}
