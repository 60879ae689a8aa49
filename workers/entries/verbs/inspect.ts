import { layoutSchema } from '../../../shared/contracts/layout';
import { Problem } from '../../../shared/errors/problem';
import { type NodeEngine, sourceOfPath } from '../node-engine';
import { readArguments, readJsonFile, requireOne } from './arguments';
import type { Console } from './console';

export const inspectUsage = 'inspect FILE [--layout L.json]';

/** Proposed layout, facts and first records of a file. */
export async function inspect(
  args: readonly string[],
  open: (workers: number) => NodeEngine,
  out: Console,
): Promise<number> {
  const { values, positionals } = readArguments(args, { layout: { type: 'string' } }, inspectUsage);
  const source = await sourceOfPath(requireOne(positionals, 'file', inspectUsage));
  const layout =
    values.layout === undefined ? null : await readJsonFile(values.layout, layoutSchema, 'layout');
  const { engine } = open(1);
  const outcome = await engine.inspect(source, layout);
  if (outcome.status === 'cancelled') return 130;
  if (outcome.status === 'error') {
    throw new Problem(outcome.problem.code, outcome.problem.message, outcome.problem.place);
  }
  await out.json(outcome.value);
  return 0;
}
