import type { PlaneResult } from '../joint-map/plane-result';

/** What a failed check of one plane takes away from the products of both; the first that holds is said. */
const reasons: readonly (readonly [id: string, reason: string])[] = [
  ['peak-found', 'no peak of pairs stands out'],
  ['pairs-enough', 'too few pairs are left with accidentals subtracted'],
  ['map-truncated', 'so many pairs miss the arrays that widths measure the arrays, not the pairs'],
  [
    'correlation-sign',
    'the two arms are not seen to be correlated the way pairs are, so widths may measure the arrays alone',
  ],
  ['fit-good', 'no Gaussian fits the joint map'],
];

/**
 * Why the products of these planes support no claim, as one clause a plane; null where they do. Moments of light without
 * any correlation lie below the bounds on a small enough array, so a product counts only where the pairs are seen to
 * be correlated and the arrays to hold them. A correlation has to be shown: there a caution is as bad as a failure.
 */
export function doubtsOf(planes: readonly PlaneResult[]): string | null {
  const clauses = planes.flatMap((plane) => {
    const bad = plane.checks.filter(
      ({ id, status }) => status === 'fail' || (id === 'correlation-sign' && status !== 'pass'),
    );
    const found = reasons.find(([reasonId]) => bad.some(({ id }) => id === reasonId));
    return found === undefined ? [] : [`in the ${plane.plane} field ${found[1]}`];
  });
  return clauses.length === 0 ? null : clauses.join('; ');
}
