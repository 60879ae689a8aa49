import { Problem } from '../../../shared/errors/problem';
import { type ColumnPlace, gatherColumn } from './columns';
import { roundedDoubles } from './numbers';
import { type DatasetEntry, type Hdf5Tree, type NumberType, rowBytesOf } from './tree';

/** A column of integers that may be time or channel. Scores above 0 are credible, 1 to 2 likely. */
export interface Candidate extends ColumnPlace {
  field: string | number | undefined;
  timeScore: number;
  channelScore: number;
}

const mostCandidates = 200;
const sampledRows = 4096;

/**
 * Every column of integers of every dataset that could hold tags, judged by its first rows and, weakly, its name.
 * Datasets that cannot be read are told in `warnings`: another one may still be what is looked for.
 */
export function candidatesOf(tree: Hdf5Tree): { candidates: Candidate[]; warnings: string[] } {
  const candidates: Candidate[] = [];
  const warnings: string[] = [];
  for (const dataset of tree.datasets) {
    if (candidates.length >= mostCandidates) break;
    const columns = dataset.refusal === null ? columnsIn(dataset) : [];
    const rows = dataset.shape[0] ?? 0;
    if (columns.length === 0 || rows === 0) continue;
    const sample = readSample(tree, dataset, Math.min(rows, sampledRows), warnings);
    if (sample === null) continue;
    for (const { field, offset, number } of columns) {
      const place: ColumnPlace = { dataset, rows, rowBytes: rowBytesOf(dataset), offset, number };
      const values = roundedDoubles(gatherColumn(sample, place), number);
      const name = typeof field === 'string' ? field : dataset.path.slice(dataset.path.lastIndexOf('/') + 1);
      candidates.push({ ...place, field, ...scoresOf(values, number, name) });
    }
  }
  return { candidates, warnings };
}

function readSample(
  tree: Hdf5Tree,
  dataset: DatasetEntry,
  rows: number,
  warnings: string[],
): Uint8Array | null {
  try {
    return tree.readRows(dataset, 0, rows);
  } catch (thrown) {
    if (!(thrown instanceof Problem)) throw thrown;
    warnings.push(thrown.message);
    return null;
  }
}

function columnsIn({
  shape,
  type,
}: DatasetEntry): { field?: string | number; offset: number; number: NumberType }[] {
  if (type.kind === 'other') return [];
  if (type.kind === 'compound') {
    if (shape.length !== 1) return [];
    return type.members.flatMap(({ name, offset, number }) =>
      number !== null && number.family !== 'float' ? [{ field: name, offset, number }] : [],
    );
  }
  const { number, bytes } = type;
  if (number.family === 'float') return [];
  if (shape.length === 1) return [{ offset: 0, number }];
  const columns = shape[1] ?? 0;
  if (shape.length !== 2 || columns < 2 || columns > 16) return [];
  return Array.from({ length: columns }, (_, field) => ({ field, offset: field * bytes, number }));
}

const timeName = /time|tick|stamp|arriv|toa/i;
const channelName = /chan|^ch\d*$|pixel|pix|addr|detector|^det|^id$|site|input/i;

function scoresOf(
  values: Float64Array,
  number: NumberType,
  name: string,
): { timeScore: number; channelScore: number } {
  let kept = 0;
  let rises = 0;
  let lowest = values[0]!;
  let highest = lowest;
  const distinct = new Set<number>();
  for (let i = 0; i < values.length; i += 1) {
    const value = values[i]!;
    if (i > 0 && value >= values[i - 1]!) kept += 1;
    if (i > 0 && value > values[i - 1]!) rises += 1;
    lowest = Math.min(lowest, value);
    highest = Math.max(highest, value);
    distinct.add(value);
  }
  const steps = Math.max(1, values.length - 1);
  const ordered = values.length > 1 ? kept / steps : 1;
  const isTimeNamed = timeName.test(name);
  const isChannelNamed = channelName.test(name);
  // Unordered columns are times only when they say so and range widely.
  const isTime = highest > lowest || values.length === 1 || isTimeNamed;
  const timeScore =
    isTime && (ordered >= 0.75 || isTimeNamed)
      ? ordered +
        0.3 * (rises / steps) +
        (number.bytes === 8 ? 0.2 : 0) +
        (highest > 65535 ? 0.2 : 0) +
        (isTimeNamed ? 0.3 : 0) -
        (isChannelNamed ? 0.5 : 0)
      : 0;
  const isChannel = lowest >= 0 && highest <= 65535;
  // A column that never changes is more likely a flag than a channel.
  const isConstant = distinct.size === 1 && values.length > 1;
  const repeats = isConstant ? 0 : 1 - distinct.size / values.length;
  const channelScore = isChannel
    ? 0.5 +
      0.5 * repeats +
      (number.bytes <= 2 ? 0.2 : 0) +
      (isChannelNamed ? 0.3 : 0) -
      (isTimeNamed ? 0.5 : 0) -
      (isConstant ? 0.3 : 0) -
      (ordered === 1 && distinct.size > 2 ? 0.4 : 0)
    : 0;
  return { timeScore, channelScore };
}
