import { scenarioSchema } from '../../../shared/contracts/scenario';
import { Cancelled, Problem } from '../../../shared/errors/problem';
import { readArguments, readJsonFile, requireOne } from './arguments';
import type { Console } from './console';

export const simulateUsage = 'simulate SCENARIO.json --out FILE';

/** Writes a simulated acquisition of a scenario. */
export async function simulate(
  args: readonly string[],
  token: { cancelled: boolean },
  out: Console,
): Promise<number> {
  const { values, positionals } = readArguments(args, { out: { type: 'string' } }, simulateUsage);
  const path = requireOne(positionals, 'scenario', simulateUsage);
  if (values.out === undefined) {
    throw new Problem('bad-input', `simulate needs --out FILE. Usage: ${simulateUsage}`, '--out');
  }
  const scenario = await readJsonFile(path, scenarioSchema, 'scenario');
  // The HDF5 library behind it takes a tenth of a second to load, which other verbs need not wait for.
  const { simulateToFile } = await import('../node-writers');
  try {
    await out.json(
      await simulateToFile(
        scenario,
        values.out,
        (text) => out.say(text),
        () => token.cancelled,
      ),
    );
  } catch (thrown) {
    if (thrown instanceof Cancelled) return 130;
    throw thrown;
  }
  return 0;
}
