import type { Ellipse } from '../../shared/contracts/output';

const POINTS = 96;

/**
 * Points of the contour `sigmas` standard deviations from the centre: x = c + k L u with L the Cholesky factor of the
 * covariance and u on the unit circle. Empty when the covariance is not positive definite.
 */
export function ellipsePoints(ellipse: Ellipse, sigmas: number): { x: number; y: number }[] {
  const { x, y, xx, xy, yy } = ellipse;
  const l11 = Math.sqrt(xx);
  const l21 = xy / l11;
  const l22 = Math.sqrt(yy - l21 * l21);
  if (!(l11 > 0) || !(l22 > 0)) return [];
  return Array.from({ length: POINTS }, (_, i) => {
    const angle = (2 * Math.PI * i) / POINTS;
    const [u, v] = [sigmas * Math.cos(angle), sigmas * Math.sin(angle)];
    return { x: x + l11 * u, y: y + l21 * u + l22 * v };
  });
}
