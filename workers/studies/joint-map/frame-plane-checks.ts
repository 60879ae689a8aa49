import type { Check } from '../../../shared/contracts/output';
import type { Plane } from '../../../shared/contracts/plane';
import type { FrameTally } from '../../../shared/contracts/tally';
import { amplitudeSigma, type FramePeak } from '../../../shared/physics/fit-frames';
import { FIT_PARAMETERS } from '../../../shared/physics/fit-shape';
import type { BlockSpread, CommonLight } from '../../../shared/physics/frame-blocks';
import type { FrameMap, FrameMapKind } from '../../../shared/physics/frame-maps';
import {
  isFlickering,
  isRepeated,
  LEAST_ROOM,
  LEAST_SNR,
  LEAST_SPREAD,
  MOST_COMMON,
  MOST_HIDDEN,
  roomOf,
} from './frame-trust';
import { checkBlocks } from './plane-checks';

export interface FrameChecksRequest {
  tally: FrameTally;
  maps: Record<FrameMapKind, FrameMap>;
  peaks: Record<FrameMapKind, FramePeak | null>;
  narrow: FrameMapKind;
  blocks: number;
  /** Null where there is too little to judge. */
  spread: BlockSpread | null;
  /** Null where nothing varies. */
  common: CommonLight | null;
  crosstalk: number;
  plane: Plane;
}

export function checkFramePlane(request: FrameChecksRequest): Check[] {
  const checks = [
    checkPeak(request),
    checkHidden(request),
    checkBlocks(request.blocks, 'blocks of frames'),
    checkFit(request),
    checkTruncation(request),
    checkEnvelope(request),
    checkWidthDrift(request),
    checkLightDrift(request),
    checkCommonLight(request),
    checkPixels(request),
  ];
  const cut = checkBlockWindow(request);
  if (cut !== null) checks.push(cut);
  const apart = checkBlockSpread(request);
  if (apart !== null) checks.push(apart);
  const { plane } = request;
  if (plane.kind === 'far' && plane.signalNm.value !== plane.idlerNm.value) {
    checks.push({
      id: 'arms-told-apart',
      status: 'caution',
      figure: Math.abs(plane.signalNm.value - plane.idlerNm.value),
      unit: 'nm',
      sentence:
        'One camera cannot tell the arms apart, so the mean of the two wavelengths scales the momenta; separate the arms on two regions for photons of different colour.',
    });
  }
  return checks;
}

const nameOf = (kind: FrameMapKind): string => (kind === 'minus' ? 'difference' : 'sum');

function checkPeak({ peaks, narrow, spread }: FrameChecksRequest): Check {
  const peak = peaks[narrow];
  const id = 'peak-found';
  if (peak === null || !peak.fit.converged) {
    const sentence = `No correlation peak stands out of the ${nameOf(narrow)} map, so no width is given; take more frames, or check that the camera really looks at the ${narrow === 'minus' ? 'near' : 'far'} field.`;
    return { id, status: 'fail', figure: null, unit: 'sigma', sentence };
  }
  if (peak.fit.atFloor) {
    const sentence = `The peak of the ${nameOf(narrow)} map is narrower than its pixels can tell, so no width is given; magnify more.`;
    return { id, status: 'fail', figure: null, unit: 'sigma', sentence };
  }
  if (!peak.fit.settled) {
    const sentence = `The fit to the ${nameOf(narrow)} map came to no rest: width and height of its peak trade for each other, so no width is given; take more frames or use more of the sensor.`;
    return { id, status: 'fail', figure: null, unit: 'sigma', sentence };
  }
  if (isRepeated(spread)) {
    const sentence = `The ${nameOf(narrow)} map has a peak, but its height over its error is not known: the blocks of frames are too much alike.`;
    return { id, status: 'caution', figure: null, unit: 'sigma', sentence };
  }
  const snr = peak.fit.amplitude / amplitudeSigma(peak);
  const base = { id, figure: snr, unit: 'sigma' };
  if (snr < LEAST_SNR) {
    const sentence = `The peak of the ${nameOf(narrow)} map is only ${snr.toFixed(1)} standard errors high, so no width is given; take more frames.`;
    return { ...base, status: 'fail', sentence };
  }
  const sentence = `The peak of the ${nameOf(narrow)} map is ${snr.toFixed(1)} standard errors high.`;
  if (snr >= 15) return { ...base, status: 'pass', sentence };
  const advice = 'Below 15 its width tends to come out a few percent too large; take more frames.';
  return { ...base, status: 'caution', sentence: `${sentence} ${advice}` };
}

/** The own pairs and the crosstalk of neighbours sit on the position peak. */
function checkHidden({ peaks, narrow, crosstalk }: FrameChecksRequest): Check {
  const peak = peaks[narrow];
  const percent = peak === null ? null : 100 * peak.hidden;
  const base = { id: 'peak-uncovered', figure: percent, unit: '%' };
  if (percent === null) {
    return {
      ...base,
      status: 'caution',
      sentence: 'Without a peak it is not known how much of it is covered.',
    };
  }
  const part = `${percent.toFixed(0)} % of the fitted peak lies on bins that are left out (own pairs${crosstalk > 0 ? ` and neighbours up to ${crosstalk} pixels` : ''})`;
  if (percent >= 100 * MOST_HIDDEN) {
    const sentence = `${part}: its width would be invented and is not given. Magnify more, or lower the crosstalk radius if the camera allows.`;
    return { ...base, status: 'fail', sentence };
  }
  if (percent <= 30) return { ...base, status: 'pass', sentence: `${part}.` };
  return { ...base, status: 'caution', sentence: `${part}: the width rests on its flanks.` };
}

function checkFit({ peaks, narrow }: FrameChecksRequest): Check {
  const peak = peaks[narrow];
  const id = 'fit-good';
  if (peak === null || peak.ndf < 1) {
    return { id, status: 'caution', figure: null, unit: 'chi^2/ndf', sentence: 'There is no fit to judge.' };
  }
  const ratio = peak.chi2 / peak.ndf;
  const deviation = (peak.chi2 - peak.ndf) / Math.sqrt(2 * peak.ndf);
  const base = { id, figure: ratio, unit: 'chi^2/ndf' };
  const found = `Chi^2 per degree of freedom of the ${nameOf(narrow)} map is ${ratio.toFixed(2)}`;
  if (deviation <= 5 || ratio < 1.2) return { ...base, status: 'pass', sentence: `${found}.` };
  const sentence = `${found}: the peak is not one Gaussian on a pedestal, or neighbouring pixels talk to each other; raise the crosstalk radius and look at the residuals.`;
  return { ...base, status: 'caution', sentence };
}

function checkTruncation({ peaks, narrow, maps }: FrameChecksRequest): Check {
  const id = 'map-truncated';
  const peak = peaks[narrow];
  if (peak === null) {
    return {
      id,
      status: 'caution',
      figure: null,
      unit: 'sigma',
      sentence: 'Without a peak its edge is not known.',
    };
  }
  const room = roomOf(peak, maps[narrow]);
  const base = { id, figure: room, unit: 'sigma' };
  const found = `The nearest edge of the ${nameOf(narrow)} map is ${room.toFixed(1)} sigma from the peak`;
  if (room >= 4) return { ...base, status: 'pass', sentence: `${found}.` };
  if (room >= LEAST_ROOM) {
    const sentence = `${found}: peak and pedestal are hard to tell apart. Use more of the sensor.`;
    return { ...base, status: 'caution', sentence };
  }
  const sentence = `${found}: peak and pedestal cannot be told apart, so no width is given. Use more of the sensor; if the light flickers, scale the frames to the mean total.`;
  return { ...base, status: 'fail', sentence };
}

/** Of large maps only a window around the middle is kept block by block. Null where it is the whole map. */
function checkBlockWindow({ peaks, narrow, maps }: FrameChecksRequest): Check | null {
  const { nx, ny, blockWindow: window } = maps[narrow];
  if (window.nx === nx && window.ny === ny) return null;
  const base = { id: 'peak-in-window', figure: Math.min(window.nx, window.ny), unit: 'bins' };
  const size = `the ${window.nx} x ${window.ny} bins around the middle of the ${nameOf(narrow)} map that are kept block by block`;
  if (peaks[narrow]?.uncovered !== true) {
    return { ...base, status: 'pass', sentence: `The fitted peak lies inside ${size}.` };
  }
  const sentence = `The fitted peak reaches past ${size}, so its errors are not known and no width is given; crop the frames around the beam, or bin them.`;
  return { ...base, status: 'fail', sentence };
}

/** Frames that repeat are no new data: their blocks agree better than counting allows. */
function checkBlockSpread({ spread }: FrameChecksRequest): Check | null {
  if (spread === null) return null;
  const { ratio, apart } = spread;
  const base = { id: 'blocks-apart', figure: ratio, unit: 'counting noise' };
  const found = `Blocks of frames ${apart === 1 ? 'next to each other' : `${apart} apart`}, the most alike, differ by ${ratio.toPrecision(2)} times the variance of counting noise`;
  if (!isRepeated(spread)) return { ...base, status: 'pass', sentence: `${found}.` };
  const sentence = `${found}, where at least ${LEAST_SPREAD} was expected: frames come more than once in the stack (copied, padded, or averaged over time), so errors would come out too small and no width is given. Use a stack in which every frame was exposed anew.`;
  return { ...base, status: 'fail', sentence };
}

function checkEnvelope({ peaks, narrow }: FrameChecksRequest): Check {
  const base = { id: 'envelope-known', figure: null, unit: '' };
  if (peaks[narrow]?.enveloped === true) {
    const sentence = 'The width of the other coordinate is known, so the envelope of the beam is in the fit.';
    return { ...base, status: 'pass', sentence };
  }
  const sentence =
    'The width of the other coordinate could not be fitted; the plain overlap stands for the envelope of the beam, which leaves the width slightly too large.';
  return { ...base, status: 'caution', sentence };
}

function checkWidthDrift({ peaks, narrow, spread }: FrameChecksRequest): Check {
  const id = 'width-drift';
  if (isRepeated(spread)) {
    const sentence = 'Blocks of frames that are too much alike do not tell whether the width drifts.';
    return { id, status: 'caution', figure: null, unit: 'sigma', sentence };
  }
  const influence = peaks[narrow]?.influence;
  if (influence === undefined) {
    return {
      id,
      status: 'caution',
      figure: null,
      unit: 'sigma',
      sentence: 'Without a peak its drift is not known.',
    };
  }
  const blocks = influence.length / FIT_PARAMETERS;
  let halves = 0;
  let mean = 0;
  const moves = Array.from(
    { length: blocks },
    (_, b) => (influence[b * FIT_PARAMETERS + 3] as number) + (influence[b * FIT_PARAMETERS + 5] as number),
  );
  moves.forEach((v, b) => {
    halves += b < blocks / 2 ? v : -v;
    mean += v / blocks;
  });
  const sigma = Math.sqrt(moves.reduce((sum, v) => sum + (v - mean) ** 2, 0));
  const z = sigma > 0 ? Math.abs(halves) / sigma : 0;
  const base = { id, figure: z, unit: 'sigma' };
  if (z <= 3.5) {
    return { ...base, status: 'pass', sentence: 'The widths of both halves of the stack agree.' };
  }
  const sentence = `The widths of the first and second half differ by ${z.toFixed(1)} standard errors: focus or pointing drifted. Cut the stack.`;
  return { ...base, status: z <= 6 ? 'caution' : 'fail', sentence };
}

/** Mean total of a frame, block by block. */
function checkLightDrift({ tally }: FrameChecksRequest): Check {
  const used = tally.blockTotals.filter((v, b) => v > 0 && (tally.blockFrames[b] ?? 0) > 0);
  const half = Math.floor(used.length / 2);
  const mean = (part: Float64Array): number => part.reduce((sum, v) => sum + v, 0) / Math.max(part.length, 1);
  const first = mean(used.subarray(0, half));
  const percent = used.length < 4 ? 0 : (100 * (mean(used.subarray(half)) - first)) / first;
  const base = { id: 'drift', figure: percent, unit: '%' };
  const found = `The light per frame changed by ${percent.toFixed(1)} % from the first to the second half`;
  if (Math.abs(percent) < 3) return { ...base, status: 'pass', sentence: `${found}.` };
  const sentence = `${found}; consecutive frames cancel most of it, but look for the cause.`;
  return { ...base, status: Math.abs(percent) < 20 ? 'caution' : 'fail', sentence };
}

/** From frame to frame; drift is slower. */
function checkCommonLight({ common }: FrameChecksRequest): Check {
  const base = { id: 'light-steady', figure: common?.ratio ?? null, unit: 'times' };
  if (common === null)
    return { ...base, status: 'caution', sentence: 'No pixel changes from frame to frame.' };
  const found = `The total of a frame varies by ${common.ratio.toFixed(2)} times what its pixels do together, where pairs can make it ${MOST_COMMON} times at most`;
  if (!isFlickering(common)) return { ...base, status: 'pass', sentence: `${found}.` };
  const sentence = `${found}: light, gain or dark level flickers from frame to frame, which correlates all pixels under the peak, so no width is given. Set the offset and scale the frames to the mean total.`;
  return { ...base, status: 'fail', sentence };
}

/** Pixels that never changed (dead or saturated) and pixels far noisier than the rest. */
function checkPixels({ tally }: FrameChecksRequest): Check {
  const { masked, sum, sumSquares } = tally;
  const frames = Math.max(tally.frames, 1);
  const open = [...masked.keys()].filter((i) => masked[i] === 0);
  const spread = open.map((i) => {
    const mean = (sum[i] as number) / frames;
    return Math.max((sumSquares[i] as number) / frames - mean * mean, 0);
  });
  const middle = [...spread].sort((a, b) => a - b)[Math.floor(spread.length / 2)] ?? 0;
  const still = middle > 0 ? spread.filter((v) => v === 0).length : 0;
  const noisy = middle > 0 ? spread.filter((v) => v > 50 * middle).length : 0;
  const base = { id: 'pixels-sound', figure: still + noisy, unit: 'pixels' };
  if (still + noisy === 0) {
    return { ...base, status: 'pass', sentence: 'No pixel is stuck or far noisier than the rest.' };
  }
  const sentence = `${still} pixels never change (dead or saturated) and ${noisy} are more than 50 times as noisy as the median; mask them in the detector map.`;
  return { ...base, status: 'caution', sentence };
}
