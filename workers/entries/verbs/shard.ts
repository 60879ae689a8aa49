import { Problem } from '../../../shared/errors/problem';
import type { Shard, ShardRequest } from '../../pipeline/shards';
import type { NodeEngine } from '../node-engine';
import { writePart } from '../part-io';
import { type Console, createProgressLine } from './console';

/** "2/8" is the second of eight. */
export function parseShard(text: string): Shard {
  const [, index, of] = /^(\d{1,6})\/(\d{1,6})$/.exec(text) ?? [];
  const shard = { index: Number(index), of: Number(of) };
  if (shard.index >= 1 && shard.index <= shard.of) return shard;
  throw new Problem('bad-input', `--shard takes i/n with i from 1 to n, found "${text}".`, '--shard');
}

/** Counts one shard of a run into a part file. Answers 0, 130 when cancelled; checks are made when parts are combined. */
export async function runShard(
  request: ShardRequest,
  where: { out?: string | undefined; maps?: string | undefined },
  { shards }: NodeEngine,
  out: Console,
): Promise<number> {
  const { shard } = request;
  if (where.out === undefined) {
    throw new Problem('bad-input', '--shard needs --out FILE for the part it counts.', '--out');
  }
  if (where.maps !== undefined) {
    throw new Problem('bad-input', 'A shard has no maps yet; give --maps to "combine".', '--maps');
  }
  const line = createProgressLine();
  const outcome = await shards.run(request, (event) => line.show(event));
  line.end();
  if (outcome.status === 'cancelled') return 130;
  if (outcome.status === 'error') {
    throw new Problem(outcome.problem.code, outcome.problem.message, outcome.problem.place);
  }
  const bytes = await writePart(where.out, outcome.value);
  const { inputs, seconds } = outcome.value.head;
  const ranges = Object.fromEntries(inputs.map(({ name, range }) => [name, range]));
  await out.json({ gemel: 1, kind: 'part', shard, out: where.out, bytes, chunks: ranges, seconds });
  return 0;
}
