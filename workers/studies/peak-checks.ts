import type { Check } from '../../shared/contracts/output';
import { poissonZ } from '../../shared/physics/find-peak';
import { ticksToPs } from '../../shared/units/ticks';
import { formatFigure, formatMeasured } from './format-figure';
import type { TagCount } from './tag-count';

/** Questions about the coincidence peak and its window. Each sentence says what was seen and what to do about it. */

export function checkPeakFound(count: TagCount): Check {
  const { found, net } = count;
  const prompt = poissonZ(count.inWindow, Math.max(0.5, count.accidentals.shifted.value));
  if (found === null && prompt < 5) {
    const sentence = `No coincidence peak stands out of the delay histogram. Check that both arms saw light, widen the histogram range, or set the delay by hand.`;
    return { id: 'peak-found', status: 'fail', figure: prompt, unit: 'sigma', sentence };
  }
  const z = Math.max(found?.z ?? 0, prompt);
  const where =
    found === null
      ? 'in the window that was set'
      : count.fit === null
        ? `at ${formatFigure(found.centre)} ps`
        : `at ${formatMeasured(count.fit.centre, count.fit.centreError)} ps`;
  const outside = found !== null && Math.abs(found.centre - count.windowCentrePs) > count.windowPs;
  if (outside || !(net.value > 0)) {
    const sentence = `The peak stands ${where}, but the window is centred on ${formatFigure(count.windowCentrePs)} ps; move the delay there or leave it to the study.`;
    return { id: 'peak-found', status: 'fail', figure: z, unit: 'sigma', sentence };
  }
  const sentence = `The coincidence peak stands ${where}, ${formatFigure(z)} sigma above the flat base.`;
  return { id: 'peak-found', status: 'pass', figure: z, unit: 'sigma', sentence };
}

/** `least` and `good`: below the first the numbers mean little, from the second on they are steady. */
export function checkPairsEnough(count: TagCount, least: number, good: number): Check {
  const pairs = Math.round(count.net.value);
  const base = { id: 'pairs-enough', figure: pairs, unit: 'pairs' };
  if (pairs >= good) {
    return {
      ...base,
      status: 'pass',
      sentence: `${pairs} pairs with accidentals subtracted are enough for steady numbers.`,
    };
  }
  const status = pairs >= least ? 'caution' : 'fail';
  const found =
    pairs > 0
      ? `Only ${pairs} pairs are left with accidentals subtracted`
      : `No pairs are left with accidentals subtracted: the window holds ${count.inWindow} pairs, ${formatFigure(count.accidentals.shifted.value)} of them accidental by the shifted windows`;
  const sentence = `${found}; ${good} or more give steady numbers. Measure longer or raise the pair rate.`;
  return { ...base, status, sentence };
}

export function checkWindowCut(count: TagCount): Check {
  const base = { id: 'window-cuts-peak', unit: '%' };
  if (count.fraction === null) {
    const sentence = 'No peak was fitted, so the share of it inside the window is not known.';
    return { ...base, status: 'caution', figure: null, sentence };
  }
  const percent = count.fraction.value * 100;
  const kept = `The window keeps ${percent.toFixed(1)} % of the fitted peak`;
  if (percent >= 90) return { ...base, status: 'pass', figure: percent, sentence: `${kept}.` };
  const status = percent >= 75 ? 'caution' : 'fail';
  const sentence = `${kept}: the cut raises the CAR and hides loss. Widen the window to four sigma of the peak.`;
  return { ...base, status, figure: percent, sentence };
}

export function checkPeakCentred(count: TagCount): Check {
  const base = { id: 'peak-centred', unit: 'ps' };
  if (count.fit === null) {
    return {
      ...base,
      status: 'caution',
      figure: null,
      sentence: 'No peak was fitted, so its place in the window is not known.',
    };
  }
  const offset = count.fit.centre - count.windowCentrePs;
  const sigmas = Math.abs(offset) / count.fit.sigma;
  const clear = Math.abs(offset) > 3 * count.fit.centreError;
  if (sigmas <= 0.5 || !clear) {
    const sentence = `The peak lies ${formatMeasured(offset, count.fit.centreError)} ps from the centre of the window, ${sigmas.toFixed(2)} of its sigma.`;
    return { ...base, status: 'pass', figure: offset, sentence };
  }
  const status = sigmas <= 1.5 ? 'caution' : 'fail';
  const sentence = `The peak lies ${formatMeasured(offset, count.fit.centreError)} ps from the centre of the window, ${sigmas.toFixed(2)} of its sigma; set the delay to ${formatFigure(count.fit.centre)} ps or leave it to the study.`;
  return { ...base, status, figure: offset, sentence };
}

/** Largest disagreement between the three estimates, in errors of the difference. */
export function checkAccidentalsAgree(count: TagCount): Check {
  const { product, shifted, sideband } = count.accidentals;
  const named = [
    // The product rests on the live time.
    ...(count.times.known ? [{ name: 'singles product', ...product }] : []),
    { name: 'shifted windows', ...shifted },
    ...(sideband === null ? [] : [{ name: 'sideband', ...sideband }]),
  ];
  let worst = { z: 0, names: '' };
  for (const [i, p] of named.entries()) {
    for (const q of named.slice(i + 1)) {
      const z = Math.abs(p.value - q.value) / Math.hypot(p.sigma, q.sigma, Number.MIN_VALUE);
      if (z > worst.z) worst = { z, names: `${p.name} and ${q.name}` };
    }
  }
  const base = { id: 'accidentals-agree', figure: worst.z, unit: 'sigma' };
  const overlap = overlappingStep(count);
  if (overlap !== null) return { ...base, status: 'fail', sentence: overlap };
  if (worst.z <= 3) {
    const sentence = `The ${named.length} estimates of the accidentals agree within ${worst.z.toFixed(1)} standard errors.`;
    return { ...base, status: 'pass', sentence };
  }
  const status = worst.z <= 5 ? 'caution' : 'fail';
  const sentence = `The accidentals from ${worst.names} differ by ${worst.z.toFixed(1)} standard errors: rates drift, pixels afterpulse or talk to each other, or a shifted window still sees the peak.`;
  return { ...base, status, sentence };
}

/** A step that leaves the first shifted window on the flank of the peak, as a sentence. */
function overlappingStep({ tally, fit, windowPs }: TagCount): string | null {
  const { shiftsTick } = tally.window;
  if (fit === null || shiftsTick.length === 0) return null;
  const step = ticksToPs(Math.min(...shiftsTick.map(Math.abs)), tally.tickFs);
  const least = windowPs + 5 * fit.sigma;
  if (step >= least) return null;
  return `The first shifted window lies ${formatFigure(step)} ps from the prompt one and still counts pairs of the peak, whose sigma is ${formatFigure(fit.sigma)} ps: accidentals come out too many and pairs too few. Set the shifted-window step to ${Math.ceil(least / 1000)} ns or more, or leave it to the study.`;
}
