import { decodeBase64, encodeBase64 } from '../util/base64';
import type { RunResult } from './engine';
import type { MapData } from './output';
import type { MapFile, ResultFile } from './result';

/**
 * Between the engine's output (typed arrays) and the result file (text). Arrays are little-endian float64 or uint8;
 * every platform Gemel runs on is little-endian, so the bytes are copied as they are.
 */

function floatsToText(values: Float64Array): string {
  return encodeBase64(new Uint8Array(values.buffer, values.byteOffset, values.byteLength));
}

function textToFloats(text: string): Float64Array {
  return new Float64Array(decodeBase64(text).buffer);
}

export function encodeMap(map: MapData): MapFile {
  return {
    label: map.label,
    shape: map.shape,
    axes: map.axes,
    unit: map.unit,
    scale: map.scale,
    data: floatsToText(map.data),
    ...(map.masked ? { masked: encodeBase64(map.masked) } : {}),
    ...(map.sigma ? { sigma: floatsToText(map.sigma) } : {}),
    ...(map.model ? { model: floatsToText(map.model) } : {}),
    ...(map.ellipse ? { ellipse: map.ellipse } : {}),
  };
}

/** `map.data` must be inline; a map that lives in a file is fetched by its address first. */
export function decodeMap(map: MapFile): MapData {
  if (map.data === undefined)
    throw new RangeError(`The map "${map.label}" is kept in ${map.file ?? 'no file'}; fetch it first.`);
  return {
    label: map.label,
    shape: map.shape,
    axes: map.axes,
    unit: map.unit,
    scale: map.scale,
    data: textToFloats(map.data),
    ...(map.masked === undefined ? {} : { masked: decodeBase64(map.masked) }),
    ...(map.sigma === undefined ? {} : { sigma: textToFloats(map.sigma) }),
    ...(map.model === undefined ? {} : { model: textToFloats(map.model) }),
    ...(map.ellipse === undefined ? {} : { ellipse: map.ellipse }),
  };
}

export function encodeResult(
  run: RunResult,
  preset: { name: string; version: number | null } | null,
): ResultFile {
  return {
    gemel: 1,
    study: run.output.study,
    quantities: run.output.quantities,
    verdicts: run.output.verdicts,
    checks: run.output.checks,
    maps: Object.fromEntries(Object.entries(run.output.maps).map(([id, map]) => [id, encodeMap(map)])),
    chosen: run.output.chosen,
    statement: run.output.statement,
    provenance: { ...run.provenance, preset },
  };
}
