import type { MapData } from '../../../../shared/contracts/output';

/** A small joint map with one masked bin and a known peak. */
export function smallMap(overrides: Partial<MapData> = {}): MapData {
  const data = new Float64Array([0, 1, 2, 3, 4, 5, 6, 7, 100, 9, 10, 11]);
  const masked = new Uint8Array(12);
  masked[5] = 1;
  return {
    label: 'Joint',
    // Four along x, three along y.
    shape: [3, 4],
    axes: [
      { label: 'x signal', unit: 'um', start: -15, step: 10, arm: 'signal' },
      { label: 'x idler', unit: 'um', start: -10, step: 10, arm: 'idler' },
    ],
    unit: 'pairs',
    scale: 'counts',
    data,
    sigma: data.map((count) => Math.sqrt(count + 1)),
    masked,
    ...overrides,
  };
}

export function smallHistogram(overrides: Partial<MapData> = {}): MapData {
  const data = Float64Array.from({ length: 21 }, (_, i) => 10 + 90 * Math.exp(-((i - 10) ** 2) / 4));
  return {
    label: 'Delay histogram',
    shape: [21],
    axes: [{ label: 'delay', unit: 'ps', start: -1000, step: 100 }],
    unit: 'pairs',
    scale: 'counts',
    data,
    sigma: data.map(Math.sqrt),
    model: data.map((value) => value - 1),
    ...overrides,
  };
}
