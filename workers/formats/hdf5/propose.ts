import type { Column, Layout } from '../../../shared/contracts/layout';
import { FS_PER_PS } from '../../../shared/units/ticks';
import { stackShape } from '../stack-shape';
import { type Candidate, candidatesOf } from './candidates';
import { namedTick } from './tick-attribute';
import { type DatasetEntry, type Hdf5Tree, rowBytesOf } from './tree';

export interface Hdf5Proposal {
  /** Null when nothing fits. */
  layout: Layout | null;
  /** Why this layout, or why none. */
  because: string;
  warnings: string[];
}

interface Pair {
  time: Candidate;
  channel: Candidate;
  score: number;
}

/** A layout for the datasets of a file by their shapes, their first values and, weakly, their names. */
export function proposeHdf5(tree: Hdf5Tree): Hdf5Proposal {
  const stack = likeliestStack(tree.datasets);
  const { candidates, warnings } = candidatesOf(tree);
  const pair = likeliestPair(candidates);
  const proposal =
    stack !== null && (pair === null || sizeOf(stack) > sizeOf(pair.time.dataset))
      ? framesProposal(stack, pair !== null)
      : pair !== null
        ? tagsProposal(tree, pair, stack, candidates)
        : { layout: null, because: nothingFits(tree), warnings: [] };
  return { ...proposal, warnings: [...warnings, ...proposal.warnings] };
}

function nothingFits(tree: Hdf5Tree): string {
  return tree.datasets.length === 0
    ? 'The file holds no datasets.'
    : 'No two columns of integers look like time and channel, and no dataset is a stack of frames; point to them by hand.';
}

function sizeOf(dataset: DatasetEntry): number {
  return rowBytesOf(dataset) * (dataset.shape[0] ?? 0);
}

function likeliestStack(datasets: readonly DatasetEntry[]): DatasetEntry | null {
  const stacks = datasets.filter(
    ({ shape, type, refusal }) => refusal === null && type.kind === 'number' && isStack(shape),
  );
  return stacks.reduce<DatasetEntry | null>(
    (best, each) => (best && sizeOf(best) >= sizeOf(each) ? best : each),
    null,
  );
}

function isStack(shape: readonly number[]): boolean {
  const sizes = stackShape(shape);
  return sizes !== null && sizes.frames >= 2 && sizes.height >= 2 && sizes.width >= 2;
}

function framesProposal(dataset: DatasetEntry, hasTags: boolean): Hdf5Proposal {
  const { frames, height, width } = stackShape(dataset.shape)!;
  return {
    layout: { version: 1, format: 'hdf5', kind: 'frames', dataset: dataset.path },
    because: `${dataset.path} is a stack of ${frames} frames of ${width} x ${height} pixels.`,
    warnings: hasTags ? ['The file also holds what may be time tags; choose them if those are meant.'] : [],
  };
}

function likeliestPair(candidates: readonly Candidate[]): Pair | null {
  let best: Pair | null = null;
  for (const time of candidates) {
    if (time.timeScore <= 0) continue;
    for (const channel of candidates) {
      if (channel === time || channel.channelScore <= 0 || channel.rows !== time.rows) continue;
      const isSame = channel.dataset.path === time.dataset.path;
      const isNear = groupOf(channel.dataset.path) === groupOf(time.dataset.path);
      const score = time.timeScore + channel.channelScore + (isSame ? 0.6 : isNear ? 0.3 : 0);
      if (best === null || score > best.score) best = { time, channel, score };
    }
  }
  return best;
}

/** A second pair, in datasets the first does not touch: often the tags of the other detector. */
function unreadPair(read: Pair, candidates: readonly Candidate[]): Pair | null {
  const taken = [read.time.dataset.path, read.channel.dataset.path];
  const other = likeliestPair(candidates.filter(({ dataset }) => !taken.includes(dataset.path)));
  return other !== null && other.score > 0.7 * read.score ? other : null;
}

function groupOf(path: string): string {
  return path.slice(0, path.lastIndexOf('/'));
}

function columnOf({ dataset, field }: Candidate): Column {
  return field === undefined ? { dataset: dataset.path } : { dataset: dataset.path, field };
}

function tagsProposal(
  tree: Hdf5Tree,
  pair: Pair,
  stack: DatasetEntry | null,
  candidates: readonly Candidate[],
): Hdf5Proposal {
  const { time, channel } = pair;
  const tick = namedTick(tree, time.dataset.path) ?? namedTick(tree, channel.dataset.path);
  const warnings = tick
    ? []
    : ['No attribute names the length of a tick: 1 ps is proposed, set the one of your time tagger.'];
  if (stack !== null)
    warnings.push(`The file also holds frames (${stack.path}); choose them if those are meant.`);
  const left = unreadPair(pair, candidates);
  if (left !== null) {
    warnings.push(
      `${nameOf(left.time)} and ${nameOf(left.channel)} look like tags too and are not read: one pair of columns is one acquisition. To correlate them, save both arms as one pair in order of time, each with channels of its own.`,
    );
  }
  const because = `${nameOf(time)} rises like time and ${nameOf(channel)}, as long, holds few values like a channel.`;
  return {
    layout: {
      version: 1,
      format: 'hdf5',
      kind: 'tags',
      time: columnOf(time),
      channel: columnOf(channel),
      tickFs: tick?.tickFs ?? FS_PER_PS,
    },
    because: tick ? `${because} The tick is the attribute "${tick.name}" of ${tick.path}.` : because,
    warnings,
  };
}

function nameOf({ dataset, field }: Candidate): string {
  if (field === undefined) return dataset.path;
  return typeof field === 'number' ? `column ${field} of ${dataset.path}` : `"${field}" of ${dataset.path}`;
}
