import type { MapFile, ResultFile } from '../../shared/contracts/result';
import { Refusal } from '../platform/refusal';

/**
 * A stored map is the UTF-8 JSON of its MapFile with the arrays inline as base64; its SHA-256 is its address. A result
 * keeps everything of its maps but the arrays.
 */

type MapHead = Omit<MapFile, 'data' | 'file' | 'masked' | 'sigma' | 'model'>;

const elementBytes = { data: 8, sigma: 8, model: 8, masked: 1 } as const;

/** Refuses a map whose arrays are missing or do not have the length its shape tells. */
export function assertMapComplete(name: string, map: MapFile): void {
  if (map.data === undefined || map.file !== undefined) {
    throw new Refusal(
      'bad-input',
      `The map ${name} must carry its numbers inline in "data", not in a file beside it.`,
      `result.maps.${name}`,
    );
  }
  if (map.axes.length !== map.shape.length) {
    throw new Refusal(
      'bad-input',
      `The map ${name} has ${map.shape.length} dimensions and ${map.axes.length} axes; it needs one axis each.`,
      `result.maps.${name}.axes`,
    );
  }
  const elements = map.shape.reduce((product, length) => product * length, 1);
  for (const key of ['data', 'sigma', 'model', 'masked'] as const) {
    const text = map[key];
    if (text === undefined) continue;
    const found = base64Bytes(text);
    const expected = elements * elementBytes[key];
    if (found === expected) continue;
    throw new Refusal(
      'bad-input',
      `The array "${key}" of the map ${name} must hold ${expected} bytes for its shape ${map.shape.join(' x ')}, but holds ${found ?? 'no whole number of'} bytes.`,
      `result.maps.${name}.${key}`,
    );
  }
}

/** Bytes a padded base64 text stands for; null when its length is not a multiple of four. */
function base64Bytes(text: string): number | null {
  if (text.length % 4 !== 0) return null;
  const padding = text.endsWith('==') ? 2 : text.endsWith('=') ? 1 : 0;
  return (text.length / 4) * 3 - padding;
}

export function packMap(map: MapFile): Uint8Array {
  return new TextEncoder().encode(JSON.stringify(map));
}

/** The result file without the arrays of its maps. */
export function withoutArrays(file: ResultFile): ResultFile {
  return { ...file, maps: mapEach(file.maps, headOf) };
}

/** The result file with the address of every map. */
export function withAddresses(file: ResultFile, addressOf: (name: string) => string): ResultFile {
  return { ...file, maps: mapEach(file.maps, (map, name) => ({ ...headOf(map), file: addressOf(name) })) };
}

function headOf(map: MapFile): MapHead {
  const { data: _data, file: _file, masked: _masked, sigma: _sigma, model: _model, ...head } = map;
  return head;
}

function mapEach<T, U>(record: Record<string, T>, change: (value: T, key: string) => U): Record<string, U> {
  return Object.fromEntries(Object.entries(record).map(([key, value]) => [key, change(value, key)]));
}
