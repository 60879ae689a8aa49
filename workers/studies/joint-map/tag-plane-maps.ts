import type { Axis, MapData } from '../../../shared/contracts/output';
import type { PlaneScale } from '../../../shared/physics/calibration';
import { pairedImage, type TagCount } from '../tag-count';
import { histogramMap } from '../tag-maps';
import type { AxisName } from './plane-result';
import { type ArmScales, goodFit, type TagAxis } from './tag-axis';

export interface TagMapsRequest {
  count: TagCount;
  x: TagAxis;
  y: TagAxis;
  scales: ArmScales;
  scale: PlaneScale;
}

export function tagPlaneMaps(request: TagMapsRequest): Record<string, MapData> {
  const { count, x, y } = request;
  return {
    'joint.x': jointMap(request, x, 'x', 'net'),
    'joint.y': jointMap(request, y, 'y', 'net'),
    'joint.x.raw': jointMap(request, x, 'x', 'raw'),
    'joint.y.raw': jointMap(request, y, 'y', 'raw'),
    'minus.x': projection(request, x, 'x', 'minus'),
    'plus.x': projection(request, x, 'x', 'plus'),
    'minus.y': projection(request, y, 'y', 'minus'),
    'plus.y': projection(request, y, 'y', 'plus'),
    difference: planarMap(request, 'difference'),
    sum: planarMap(request, 'sum'),
    'image.signal': imageMap(request, 'signal'),
    'image.idler': imageMap(request, 'idler'),
    'delay.histogram': histogramMap(count),
  };
}

/** Net counts and their Poisson errors: n - s/m, sqrt(n + s/m^2). */
function netOf(
  prompt: Float64Array,
  shifted: Float64Array,
  windows: number,
): { data: Float64Array; sigma: Float64Array } {
  const m = Math.max(windows, 1);
  return {
    data: prompt.map((n, k) => n - (shifted[k] as number) / m),
    sigma: prompt.map((n, k) => Math.sqrt(n + (shifted[k] as number) / (m * m))),
  };
}

function armAxis(request: TagMapsRequest, arm: 'signal' | 'idler', axis: AxisName, n: number): Axis {
  const step = request.scales[arm];
  const symbol = request.scale.symbol === 'x' ? axis : `k_${axis}`;
  return { label: `${symbol} ${arm}`, unit: request.scale.unit, start: (-(n - 1) / 2) * step, step, arm };
}

function jointMap(request: TagMapsRequest, found: TagAxis, axis: AxisName, what: 'net' | 'raw'): MapData {
  const { count, scales } = request;
  const { n1, n2, prompt, shifted } = found;
  const fit = goodFit(found);
  const { tally } = count;
  const net = netOf(prompt, shifted, tally.window.shiftsTick.length);
  const axes = [armAxis(request, 'signal', axis, n1), armAxis(request, 'idler', axis, n2)] as const;
  const map: MapData = {
    label: what === 'net' ? `Joint map of ${axis}, accidentals subtracted` : `Joint map of ${axis}, raw`,
    shape: [n2, n1],
    axes: [...axes],
    unit: 'pairs',
    scale: what === 'net' ? 'signed' : 'counts',
    data: what === 'net' ? net.data : prompt,
    sigma: what === 'net' ? net.sigma : prompt.map(Math.sqrt),
  };
  if (fit === null) return map;
  const { shape } = fit.fit;
  return {
    ...map,
    masked: fit.use.map((u) => 1 - u),
    model: what === 'net' ? fit.fit.peak : fit.fit.model,
    ellipse: {
      x: axes[0].start + shape.mx * axes[0].step,
      y: axes[1].start + shape.my * axes[1].step,
      xx: fit.blurred.v1 * scales.signal ** 2,
      xy: fit.blurred.c * scales.signal * scales.idler,
      yy: fit.blurred.v2 * scales.idler ** 2,
    },
  };
}

/** Arms with one common step have difference and sum bins in crystal units; others only in pixels. */
function pairAxis(request: TagMapsRequest, label: string, first: number): Axis {
  const { signal, idler } = request.scales;
  const same = Math.abs(signal / idler - 1) < 1e-9;
  const step = same ? signal : 1;
  return { label, unit: same ? request.scale.unit : 'px', start: first * step, step, arm: 'pair' };
}

/** Signal minus idler, or signal plus idler, about the middle of the arrays. */
function projection(
  request: TagMapsRequest,
  found: TagAxis,
  axis: AxisName,
  what: 'minus' | 'plus',
): MapData {
  const { n1, n2 } = found;
  const fit = goodFit(found);
  const { tally } = request.count;
  const cells = n1 * n2;
  const bins = n1 + n2 - 1;
  const fold = (map: Float64Array): Float64Array => {
    const out = new Float64Array(bins);
    for (let c = 0; c < cells; c += 1) {
      const x1 = c % n1;
      const x2 = Math.floor(c / n1);
      const bin = what === 'minus' ? x1 - x2 + n2 - 1 : x1 + x2;
      out[bin] = (out[bin] as number) + (map[c] as number);
    }
    return out;
  };
  const net = netOf(fold(found.prompt), fold(found.shifted), tally.window.shiftsTick.length);
  const symbol = request.scale.symbol === 'x' ? axis : `k_${axis}`;
  const label =
    what === 'minus' ? `${symbol} signal - ${symbol} idler` : `${symbol} signal + ${symbol} idler`;
  const first = what === 'minus' ? (n2 - n1) / 2 - (n2 - 1) : -(n1 + n2 - 2) / 2;
  const map: MapData = {
    label: what === 'minus' ? `Difference coordinate ${symbol}` : `Sum coordinate ${symbol}`,
    shape: [bins],
    axes: [pairAxis(request, label, first)],
    unit: 'pairs',
    scale: 'signed',
    ...net,
  };
  return fit === null ? map : { ...map, model: fold(fit.fit.peak) };
}

/** Two-dimensional. The tally keeps idler minus signal; shown is signal minus idler, as along one axis. */
function planarMap(request: TagMapsRequest, what: 'difference' | 'sum'): MapData {
  const { tally } = request.count;
  const { a, b } = tally;
  const nx = a.width + b.width - 1;
  const ny = a.height + b.height - 1;
  const symbol = request.scale.symbol;
  const sign = what === 'difference' ? '-' : '+';
  const first = (na: number, nb: number): number =>
    what === 'difference' ? (nb - na) / 2 - (nb - 1) : -(na + nb - 2) / 2;
  const label = (axis: AxisName): string => {
    const name = symbol === 'x' ? axis : `k_${axis}`;
    return `${name} signal ${sign} idler`;
  };
  const net = netOf(tally.prompt[what], tally.shifted[what], tally.window.shiftsTick.length);
  // Turning both axes round is reading the bins backwards.
  const turned = what === 'sum' ? net : { data: net.data.toReversed(), sigma: net.sigma.toReversed() };
  return {
    label: what === 'difference' ? 'Difference coordinate' : 'Sum coordinate',
    shape: [ny, nx],
    axes: [
      pairAxis(request, label('x'), first(a.width, b.width)),
      pairAxis(request, label('y'), first(a.height, b.height)),
    ],
    unit: 'pairs',
    scale: 'signed',
    ...turned,
  };
}

/** Net image of the paired tags of one arm. */
function imageMap(request: TagMapsRequest, name: 'signal' | 'idler'): MapData {
  const { tally } = request.count;
  const arm = name === 'signal' ? tally.a : tally.b;
  const side = name === 'signal' ? 'A' : 'B';
  const pixels = arm.width * arm.height;
  return {
    label: `Paired tags of the ${name} arm, accidentals subtracted`,
    shape: [arm.height, arm.width],
    axes: [armAxis(request, name, 'x', arm.width), armAxis(request, name, 'y', arm.height)],
    unit: 'pairs',
    scale: 'signed',
    masked: Uint8Array.from(arm.masked),
    ...netOf(
      pairedImage(tally.prompt, side, pixels),
      pairedImage(tally.shifted, side, pixels),
      tally.window.shiftsTick.length,
    ),
  };
}
