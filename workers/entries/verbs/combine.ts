import { Problem } from '../../../shared/errors/problem';
import { combineParts } from '../../pipeline/combine';
import { loadKernels } from '../../pipeline/kernels';
import { compileKernels } from '../../pipeline/kernels-node';
import { loadPart, loadPartHead } from '../part-io';
import { readArguments } from './arguments';
import type { Console } from './console';
import { writeResult } from './run';

export const combineUsage = 'combine PART... --out R.json [--maps DIR]';

/** Merges the parts of all shards and finishes, without the acquisitions. Answers 0, 3 when a check failed. */
export async function combine(args: readonly string[], out: Console): Promise<number> {
  const { values, positionals } = readArguments(
    args,
    { out: { type: 'string' }, maps: { type: 'string' } },
    combineUsage,
  );
  if (positionals.length === 0) {
    throw new Problem('bad-input', `Expected parts, found none. Usage: ${combineUsage}`, 'command line');
  }
  const given = await Promise.all(
    positionals.map(async (place) => ({ place, head: await loadPartHead(place) })),
  );
  const result = await combineParts(given, loadPart, await loadKernels(compileKernels));
  await writeResult(result, { name: given[0]!.head.preset }, values, out);
  return result.output.checks.some((check) => check.status === 'fail') ? 3 : 0;
}
