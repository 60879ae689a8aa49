/** Slope at each knot that keeps every piece monotonic (Fritsch and Carlson, SIAM J. Numer. Anal. 17, 238, 1980). */
export function monotoneSlopes(at: readonly number[], value: readonly number[]): number[] {
  const secants = at.slice(1).map((x, i) => (value[i + 1]! - value[i]!) / (x - at[i]!));
  return at.map((_, i) => {
    const [left, right] = [secants[i - 1], secants[i]];
    if (left === undefined || right === undefined) return left ?? right ?? 0;
    return left * right <= 0 ? 0 : (2 * left * right) / (left + right);
  });
}

/** Cubic Hermite interpolation through rising knots without overshoot. */
export function interpolateMonotone(at: readonly number[], value: readonly number[], x: number): number {
  const slopes = monotoneSlopes(at, value);
  let i = 0;
  while (i < at.length - 2 && x > at[i + 1]!) i++;
  const width = at[i + 1]! - at[i]!;
  const t = (x - at[i]!) / width;
  const [t2, t3] = [t * t, t * t * t];
  return (
    (2 * t3 - 3 * t2 + 1) * value[i]! +
    (t3 - 2 * t2 + t) * width * slopes[i]! +
    (3 * t2 - 2 * t3) * value[i + 1]! +
    (t3 - t2) * width * slopes[i + 1]!
  );
}
