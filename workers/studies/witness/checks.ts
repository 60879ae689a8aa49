import type { Check, Verdict } from '../../../shared/contracts/output';
import { productRelativeError } from '../../../shared/physics/calibration';
import { isShaken } from '../../../shared/physics/witness';
import type { PlaneResult } from '../joint-map/plane-result';
import type { CountedInput } from '../study';

/** Checks of one plane, told apart by the plane's name. */
export function planeChecks(name: 'near' | 'far', checks: readonly Check[]): Check[] {
  const title = name === 'near' ? 'Near field' : 'Far field';
  return checks.map((check) => ({
    ...check,
    id: `${check.id}.${name}`,
    sentence: `${title}: ${check.sentence}`,
  }));
}

/** Relative systematic error of a product of variances. */
export function productSystematic(near: PlaneResult, far: PlaneResult): number {
  return productRelativeError([near.scale.relative, far.scale.relative]);
}

/** Whether the verdicts would stand if the calibration were off by its error against us. */
export function checkProductCalibration(
  near: PlaneResult,
  far: PlaneResult,
  verdicts: Record<string, Verdict>,
  values: (id: string) => number | undefined,
): Check {
  const relative = productSystematic(near, far);
  const percent = 100 * relative;
  const base = { id: 'calibration-known', figure: percent, unit: '%' };
  if (near.scale.relative === 0 || far.scale.relative === 0) {
    const sentence =
      'A calibration carries no uncertainty, as if it were exact; give the errors of magnification, focal length and wavelengths.';
    return { ...base, status: 'caution', sentence };
  }
  const shaken = Object.entries(verdicts).filter(([id, verdict]) => {
    const value = values(id);
    const claims = verdict.level === 'violated' || verdict.level === 'indicated';
    return claims && value !== undefined && isShaken(value, relative, verdict.bound);
  });
  const common = `The calibrations add ${percent.toFixed(1)} % to every product, common to all blocks and not in the errors quoted`;
  if (shaken.length === 0) return { ...base, status: 'pass', sentence: `${common}; no verdict hangs on it.` };
  const names = shaken.map(([id]) => id).join(', ');
  const sentence = `${common}; twice that would take ${names} to the bound. Calibrate better.`;
  return { ...base, status: 'caution', sentence };
}

/** A witness compares the same pairs in two planes: the same pixels should look at both. */
export function checkSamePixels(near: CountedInput, far: CountedInput): Check {
  const base = { id: 'same-pixels', figure: null, unit: '' };
  const differences = pixelDifferences(near, far);
  if (differences.length === 0) {
    const sentence = 'Both planes were taken with the same arrays, pitch and mask.';
    return { ...base, status: 'pass', sentence };
  }
  const sentence = `The two planes differ in ${differences.join(', ')}: make sure that both saw the same pairs (same filters, same collection), or the product compares different ones.`;
  return { ...base, status: 'caution', sentence };
}

function pixelDifferences(near: CountedInput, far: CountedInput): string[] {
  const a = near.detector;
  const b = far.detector;
  if (a.kind !== b.kind) return ['the kind of detector'];
  if (a.kind === 'frames' && b.kind === 'frames') {
    const out: string[] = [];
    if (a.pitchUm !== b.pitchUm) out.push('pitch');
    if (!sameSet(a.maskedPixels, b.maskedPixels)) out.push('mask');
    const sizes = [near.tally, far.tally].map((t) => (t.kind === 'frames' ? `${t.width}x${t.height}` : ''));
    if (sizes[0] !== sizes[1]) out.push('frame size');
    return out;
  }
  if (a.kind !== 'tags' || b.kind !== 'tags') return [];
  return (['signal', 'idler'] as const).flatMap((arm) => {
    const p = a[arm];
    const q = b[arm];
    if (p === undefined || q === undefined) return [];
    const out: string[] = [];
    if (p.width !== q.width || p.height !== q.height) out.push(`size of the ${arm} array`);
    if (p.pitchUm !== q.pitchUm) out.push(`pitch of the ${arm} array`);
    if (!sameSet(p.maskedPixels, q.maskedPixels)) out.push(`mask of the ${arm} array`);
    return out;
  });
}

function sameSet(a: readonly number[], b: readonly number[]): boolean {
  const inA = new Set(a);
  const inB = new Set(b);
  return inA.size === inB.size && [...inA].every((v) => inB.has(v));
}

/** The plane with fewer pairs decides the error of the product. */
export function checkBalance(near: PlaneResult, far: PlaneResult): Check | null {
  const counts = [near, far].map((plane) => plane.axes.x.net.minus?.n ?? plane.axes.x.net.plus?.n ?? 0);
  if (near.kind !== 'tags' || far.kind !== 'tags' || counts.some((n) => n === 0)) return null;
  const [a = 1, b = 1] = counts;
  const ratio = Math.max(a / b, b / a);
  const base = { id: 'planes-balanced', figure: ratio, unit: '1' };
  if (ratio <= 5) {
    const sentence = `The planes hold ${a} and ${b} pairs with accidentals subtracted.`;
    return { ...base, status: 'pass', sentence };
  }
  const sentence = `The planes hold ${a} and ${b} pairs with accidentals subtracted: the smaller one sets the error of every product; give it more time.`;
  return { ...base, status: 'caution', sentence };
}
