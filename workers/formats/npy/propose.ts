import type { ArrayColumn, Layout } from '../../../shared/contracts/layout';
import { Problem } from '../../../shared/errors/problem';
import { FS_PER_PS } from '../../../shared/units/ticks';
import { type ColumnScores, scoreColumn } from '../column-scores';
import { roundedDoubles } from '../numbers';
import type { ArrayEntry, FoundArray } from './arrays';
import { openColumns } from './column-reader';
import { arrayName, type ColumnPlace, columnsIn } from './columns';
import { likeliestStack } from './stack';

export interface NpyProposal {
  /** Null when nothing fits. */
  layout: Layout | null;
  because: string;
  warnings: string[];
}

interface Candidate extends ColumnScores {
  column: ColumnPlace;
}

interface Pair {
  time: Candidate;
  channel: Candidate;
  score: number;
}

const mostCandidates = 200;
const sampledRows = 4096;
const sampledBytes = 2 ** 20;
const never = { cancelled: false };

/** A layout for the arrays of a file by their shapes, their first values and, weakly, their names. */
export async function proposeNpy(found: readonly FoundArray[], isArchive: boolean): Promise<NpyProposal> {
  const stack = likeliestStack(found);
  const { candidates, warnings } = await candidatesOf(found);
  const pair = likeliestPair(candidates);
  if (stack !== null && (pair === null || stack.dataBytes > pair.time.column.array.dataBytes)) {
    const tagsToo =
      pair === null ? [] : ['The file also holds what may be time tags; choose them if those are meant.'];
    return framesProposal(stack, [...warnings, ...tagsToo]);
  }
  if (pair !== null) return tagsProposal(pair, stack, candidates, warnings);
  const because = isArchive
    ? 'No two columns of whole numbers look like time and channel, and no array is a stack of frames; point to them by hand.'
    : 'The array is no table of times and channels and no stack of frames: save both columns by numpy.savez(name, time=…, channel=…), or frames as one array of three dimensions.';
  return { layout: null, because, warnings };
}

function framesProposal(array: ArrayEntry, warnings: string[]): NpyProposal {
  return {
    layout: {
      version: 1,
      format: 'npy',
      kind: 'frames',
      ...(array.name === undefined ? {} : { array: array.name }),
    },
    because: `${capital(arrayName(array))} is a stack of frames by its shape (${array.shape.join(' x ')}).`,
    warnings,
  };
}

async function candidatesOf(
  found: readonly FoundArray[],
): Promise<{ candidates: Candidate[]; warnings: string[] }> {
  const candidates: Candidate[] = [];
  const warnings: string[] = [];
  for (const each of found) {
    if (!('array' in each) || candidates.length >= mostCandidates) continue;
    const columns = columnsIn(each.array).filter(({ rows }) => rows > 0);
    try {
      candidates.push(...(await judge(columns)));
    } catch (thrown) {
      if (!(thrown instanceof Problem)) throw thrown;
      warnings.push(thrown.message);
    }
  }
  return { candidates, warnings };
}

async function judge(columns: readonly ColumnPlace[]): Promise<Candidate[]> {
  const first = columns[0];
  if (first === undefined) return [];
  const rows = Math.max(1, Math.min(first.rows, sampledRows, Math.floor(sampledBytes / first.stride)));
  const reader = await openColumns(columns);
  const samples = await reader.read(0, rows, never);
  return columns.flatMap((column, k) => {
    const values = roundedDoubles(samples[k]!, column.number);
    // Floats may stand for whole numbers; a fraction says that they do not.
    if (column.number.family === 'float' && !values.every(Number.isSafeInteger)) return [];
    const name = typeof column.field === 'string' ? column.field : (column.array.name ?? '');
    return [{ column, ...scoreColumn(values, column.number.bytes, name) }];
  });
}

function likeliestPair(candidates: readonly Candidate[]): Pair | null {
  let best: Pair | null = null;
  for (const time of candidates) {
    if (time.timeScore <= 0) continue;
    for (const channel of candidates) {
      const isUsable =
        channel !== time && channel.channelScore > 0 && channel.column.rows === time.column.rows;
      if (!isUsable) continue;
      const isSame = channel.column.array === time.column.array;
      const score = time.timeScore + channel.channelScore + (isSame ? 0.6 : 0.3);
      if (best === null || score > best.score) best = { time, channel, score };
    }
  }
  return best;
}

/** A second pair, in arrays the first does not touch: often the tags of the other detector. */
function unreadPair(read: Pair, candidates: readonly Candidate[]): Pair | null {
  const taken = [read.time.column.array, read.channel.column.array];
  const other = likeliestPair(candidates.filter(({ column }) => !taken.includes(column.array)));
  return other !== null && other.score > 0.7 * read.score ? other : null;
}

function tagsProposal(
  pair: Pair,
  stack: ArrayEntry | null,
  candidates: readonly Candidate[],
  warnings: string[],
): NpyProposal {
  const time = pair.time.column;
  const channel = pair.channel.column;
  const said = [
    'Files of NumPy do not tell the length of a tick: 1 ps is proposed, set the one of your time tagger.',
  ];
  if (stack !== null) {
    said.push(`The file also holds frames (${arrayName(stack)}); choose them if those are meant.`);
  }
  const left = unreadPair(pair, candidates);
  if (left !== null) {
    said.push(
      `${capital(columnName(left.time.column))} and ${columnName(left.channel.column)} look like tags too and are not read: one pair of columns is one acquisition. To correlate them, save both arms as one pair in order of time, each with channels of its own.`,
    );
  }
  return {
    layout: {
      version: 1,
      format: 'npy',
      kind: 'tags',
      time: columnOf(time),
      channel: columnOf(channel),
      tickFs: FS_PER_PS,
    },
    because: `${capital(columnName(time))} rises like time and ${columnName(channel)}, as long, holds few values like a channel.`,
    warnings: [...warnings, ...said],
  };
}

function columnOf({ array, field }: ColumnPlace): ArrayColumn {
  return {
    ...(array.name === undefined ? {} : { array: array.name }),
    ...(field === undefined ? {} : { field }),
  };
}

function columnName({ array, field }: ColumnPlace): string {
  if (field === undefined) return arrayName(array);
  return typeof field === 'number'
    ? `column ${field} of ${arrayName(array)}`
    : `"${field}" of ${arrayName(array)}`;
}

/** Names of arrays keep their letters. */
function capital(sentence: string): string {
  return sentence.replace(/^the array/, 'The array').replace(/^column (?=\d)/, 'Column ');
}
