import type { Axis, MapData } from '../../../shared/contracts/output';
import type { FrameTally } from '../../../shared/contracts/tally';
import type { PlaneScale } from '../../../shared/physics/calibration';
import type { FramePeak } from '../../../shared/physics/fit-frames';
import type { FrameMap, FrameMapKind } from '../../../shared/physics/frame-maps';
import { frameJointMaps } from './frame-joint-maps';
import type { AxisName } from './plane-result';

export interface FrameMapsRequest {
  tally: FrameTally;
  maps: Record<FrameMapKind, FrameMap>;
  peaks: Record<FrameMapKind, FramePeak | null>;
  /** Crystal units per pixel. */
  pixel: number;
  scale: PlaneScale;
  /** Sum and difference maps as means per pixel pair, else as sums over them. */
  perPair: boolean;
}

export function framePlaneMaps(request: FrameMapsRequest): Record<string, MapData> {
  return {
    minus: planeMap(request, 'minus'),
    plus: planeMap(request, 'plus'),
    'mean.frame': meanFrame(request),
    'joint.x': jointMap(request, 'x'),
    'joint.y': jointMap(request, 'y'),
    ...frameJointMaps(request.tally, (axis, from, n) => regionAxis(request, axis, from, n)),
  };
}

function regionAxis(request: FrameMapsRequest, axis: AxisName, from: number, n: number): Axis {
  const whole = axisOf(request, axis, axis === 'x' ? request.tally.width : request.tally.height, '', '');
  const part = axisOf(request, axis, n, '', '');
  return { ...part, start: whole.start + from * whole.step };
}

function axisOf(
  request: FrameMapsRequest,
  axis: AxisName,
  n: number,
  prefix: string,
  suffix: string,
  arm?: Axis['arm'],
): Axis {
  const symbol = request.scale.symbol === 'x' ? axis : `k_${axis}`;
  const step = request.pixel;
  return {
    label: `${prefix}${symbol}${suffix}`,
    unit: request.scale.unit,
    start: (-(n - 1) / 2) * step,
    step,
    ...(arm === undefined ? {} : { arm }),
  };
}

/** Covariance of the pairs of pixels in each bin, with its counting noise and, inside the fitted window, the model. */
function planeMap(request: FrameMapsRequest, kind: FrameMapKind): MapData {
  const map = request.maps[kind];
  const peak = request.peaks[kind];
  const { nx, ny, pairs, blocked } = map;
  const over = (c: number): number => (request.perPair ? (pairs[c] as number) : 1);
  const shown = (values: Float64Array): Float64Array =>
    values.map((v, c) => (blocked[c] === 1 ? 0 : v / over(c)));
  const name = kind === 'minus' ? 'difference' : 'sum';
  const axes = [
    axisOf(request, 'x', nx, `${name} of `, '', 'pair'),
    axisOf(request, 'y', ny, `${name} of `, '', 'pair'),
  ];
  const out: MapData = {
    label: kind === 'minus' ? 'Difference coordinate' : 'Sum coordinate',
    shape: [ny, nx],
    axes,
    unit: 'counts^2',
    scale: 'signed',
    data: shown(map.value),
    masked: blocked,
    sigma: shown(map.variance.map(Math.sqrt)),
  };
  if (peak === null) return out;
  const { region } = peak;
  const model = new Float64Array(nx * ny);
  for (let y = 0; y < region.ny; y += 1) {
    for (let x = 0; x < region.nx; x += 1) {
      const c = (region.y + y) * nx + region.x + x;
      if (blocked[c] === 0) model[c] = (peak.model[y * region.nx + x] as number) / over(c);
    }
  }
  // Fitted centres are lags for the difference map and index sums for the sum map.
  const offset = kind === 'minus' ? 0 : 1;
  const step = request.pixel;
  return {
    ...out,
    model,
    ellipse: {
      x: (peak.mx - (offset * (nx - 1)) / 2) * step,
      y: (peak.my - (offset * (ny - 1)) / 2) * step,
      xx: peak.xx * step * step,
      xy: peak.xy * step * step,
      yy: peak.yy * step * step,
    },
  };
}

function meanFrame(request: FrameMapsRequest): MapData {
  const { tally } = request;
  const frames = Math.max(tally.frames, 1);
  return {
    label: 'Mean frame',
    shape: [tally.height, tally.width],
    axes: [axisOf(request, 'x', tally.width, '', ''), axisOf(request, 'y', tally.height, '', '')],
    unit: 'counts',
    scale: 'counts',
    data: tally.sum.map((v) => v / frames),
    masked: Uint8Array.from(tally.masked),
    sigma: tally.sumSquares.map((v, i) => {
      const mean = (tally.sum[i] as number) / frames;
      return Math.sqrt(Math.max(v / frames - mean * mean, 0) / frames);
    }),
  };
}

/** Covariance summed over the other coordinate, own pairs taken out. Symmetric: the camera does not know the arms. */
function jointMap(request: FrameMapsRequest, axis: AxisName): MapData {
  const { tally } = request;
  const { width, height } = tally;
  const n = axis === 'x' ? width : height;
  const per = 1 / Math.max(tally.frames - 1, 1);
  const data = (axis === 'x' ? tally.jointX : tally.jointY).map((v) => v * per);
  for (let i = 0; i < width * height; i += 1) {
    const at = axis === 'x' ? i % width : Math.floor(i / width);
    data[at * n + at] = (data[at * n + at] as number) - per * (tally.diagonal[i] as number);
  }
  return {
    label: `Joint map of ${axis}, covariance`,
    shape: [n, n],
    axes: [axisOf(request, axis, n, '', ' first photon'), axisOf(request, axis, n, '', ' second photon')],
    unit: 'counts^2',
    scale: 'signed',
    data,
  };
}
