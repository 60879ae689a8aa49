import type { Verdict } from '../../../shared/contracts/output';
import { spreadOf } from '../../../shared/physics/bootstrap';
import { judge, type Witness, witnesses } from '../../../shared/physics/witness';
import type { Resampled } from '../joint-map/resampled';
import type { AxisProducts, Subtraction } from './products';

export interface Judged {
  id: string;
  part: Resampled | null;
  witness: Witness;
  axis: string;
  what: Subtraction;
  bounded: boolean;
}

/** The products of one axis (or both) with the witness each belongs to. */
export function judgedProducts(
  products: Pick<AxisProducts, 'reid' | 'mancini' | 'bounded'>,
  axis: 'x' | 'y' | 'xy',
  what: Subtraction,
): Judged[] {
  const name = axis === 'xy' ? 'x and y together' : axis;
  return [
    {
      id: `reid.${axis}.${what}`,
      part: products.reid,
      witness: witnesses.reid,
      axis: name,
      what,
      bounded: products.bounded,
    },
    {
      id: `mancini.${axis}.${what}`,
      part: products.mancini,
      witness: witnesses.mancini,
      axis: name,
      what,
      bounded: false,
    },
  ];
}

export interface VerdictContext {
  /** Bytes are still being read. */
  looking: boolean;
  /** Why no product of these planes supports a claim; null where it may. */
  doubts: string | null;
  /** Relative systematic error of the product, 1 sigma. */
  systematic: number;
}

/** Null where value or error is missing. */
export function verdictOf(judged: Judged, context: VerdictContext): Verdict | null {
  const { part, witness, axis, what, bounded } = judged;
  if (part === null) return null;
  const spread = spreadOf(part.resampled);
  if (!(part.value > 0) || !(spread.sigma > 0)) return null;
  const verdict = judge({
    witness,
    axis,
    value: part.value,
    spread,
    resampled: part.resampled,
    systematic: context.systematic,
    doubts: context.doubts,
    assumptions: `${assumptionsOf(what, bounded)} ${calibrationWords(context.systematic)}`,
  });
  return context.looking ? { ...verdict, sentence: `So far, still reading: ${verdict.sentence}` } : verdict;
}

function calibrationWords(systematic: number): string {
  const scale = 'Errors of counting only, significance on the logarithmic scale';
  return systematic > 0 ? `${scale}; the calibrations add ${(100 * systematic).toFixed(1)} %.` : `${scale}.`;
}

function assumptionsOf(what: Subtraction, bounded: boolean): string {
  const camera = bounded
    ? ' For camera frames the conditional variances are bounded from above by those of the difference and the sum.'
    : '';
  return what === 'raw'
    ? 'Raw: nothing is subtracted and the blur of the pixels is left in; fair sampling of the pairs that meet the arrays is assumed.'
    : `Accidentals subtracted: assumes fair sampling, uncorrelated accidentals and a Gaussian peak; the blur of the pixels is left in.${camera}`;
}
