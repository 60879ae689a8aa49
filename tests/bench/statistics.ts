export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  if (sorted.length === 0) return Number.NaN;
  return sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2;
}

/** Slope of log time against log size by least squares: 1 when twice the work takes twice the time. */
export function growthExponent(points: readonly { items: number; seconds: number }[]): number {
  const x = points.map(({ items }) => Math.log(items));
  const y = points.map(({ seconds }) => Math.log(seconds));
  const meanX = x.reduce((sum, value) => sum + value, 0) / x.length;
  const meanY = y.reduce((sum, value) => sum + value, 0) / y.length;
  let product = 0;
  let squares = 0;
  x.forEach((value, i) => {
    product += (value - meanX) * (y[i]! - meanY);
    squares += (value - meanX) ** 2;
  });
  return product / squares;
}
