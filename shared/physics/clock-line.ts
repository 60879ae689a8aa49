/** A straight line through points with errors, and how well it holds. */
export interface LineFit {
  /** Value at x = 0, slope, their variances and covariance as the errors of the points say. */
  value: number;
  slope: number;
  valueVariance: number;
  slopeVariance: number;
  covariance: number;
  /** Chi-squared over points less two; 1 expected, more where a line is not all there is. Zero degrees give 1. */
  chi2PerDof: number;
  /** Weighted root mean square of what the line leaves. */
  residual: number;
}

export interface LinePoint {
  x: number;
  y: number;
  sigma: number;
}

/**
 * Weighted least squares of y = a + b x with weights 1/sigma^2, from the normal equations about the weighted mean of x:
 * b = S_xy/S_xx, var b = 1/S_xx, var a = 1/S + mean^2/S_xx. Check value: offsets .02, 1.01, 1.98, 3.01 us at 0, 10, 20,
 * 30 s give 0.0994 ppm. Cost O(points); null for fewer than two different x.
 */
export function fitLine(points: readonly LinePoint[]): LineFit | null {
  let weights = 0;
  let meanX = 0;
  let meanY = 0;
  for (const { x, y, sigma } of points) {
    const w = 1 / sigma ** 2;
    weights += w;
    meanX += w * x;
    meanY += w * y;
  }
  meanX /= weights;
  meanY /= weights;
  let sxx = 0;
  let sxy = 0;
  for (const { x, y, sigma } of points) {
    sxx += (x - meanX) ** 2 / sigma ** 2;
    sxy += ((x - meanX) * (y - meanY)) / sigma ** 2;
  }
  if (!(sxx > 0)) return null;
  const slope = sxy / sxx;
  let chi2 = 0;
  for (const { x, y, sigma } of points) chi2 += ((y - meanY - slope * (x - meanX)) / sigma) ** 2;
  return {
    value: meanY - slope * meanX,
    slope,
    valueVariance: 1 / weights + meanX ** 2 / sxx,
    slopeVariance: 1 / sxx,
    covariance: -meanX / sxx,
    chi2PerDof: points.length > 2 ? chi2 / (points.length - 2) : 1,
    residual: Math.sqrt(chi2 / weights),
  };
}
