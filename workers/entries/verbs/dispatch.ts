import { Problem, toProblemData } from '../../../shared/errors/problem';
import type { NodeEngine } from '../node-engine';
import { combine, combineUsage } from './combine';
import type { Console } from './console';
import { inspect, inspectUsage } from './inspect';
import { run, runUsage } from './run';
import { simulate, simulateUsage } from './simulate';
import { listStudies, studiesUsage, template, templateUsage } from './template';

/** What a verb stands on; the process gives the real ones, tests their own. */
export interface VerbHost {
  out: Console;
  open(workers: number): NodeEngine;
  /** Set when the person interrupts. */
  token: { cancelled: boolean };
}

const usage = [studiesUsage, templateUsage, inspectUsage, runUsage, combineUsage, simulateUsage]
  .map((line) => `  npm run --silent gemel -- ${line}`)
  .join('\n');

/**
 * Runs one verb and answers the exit code: 0 done, 1 a fault of Gemel's own, 2 bad input (one sentence with the place on
 * stderr), 3 done but a check failed, 130 cancelled.
 */
export async function runVerb(argv: readonly string[], host: VerbHost): Promise<number> {
  try {
    return await dispatch(argv, host);
  } catch (thrown) {
    return reportFailure(thrown, host.out);
  }
}

export function reportFailure(thrown: unknown, out: Console): number {
  const problem = toProblemData(thrown);
  out.say(problem.place === null ? problem.message : `${problem.message} [${problem.place}]`);
  return problem.code === 'internal' ? 1 : 2;
}

async function dispatch([verb, ...args]: readonly string[], host: VerbHost): Promise<number> {
  switch (verb) {
    case 'studies':
      return listStudies(args, host.out);
    case 'template':
      return template(args, host.out);
    case 'inspect':
      return inspect(args, host.open, host.out);
    case 'run':
      return run(args, host.open, host.out);
    case 'combine':
      return combine(args, host.out);
    case 'simulate':
      return simulate(args, host.token, host.out);
    case undefined:
    case 'help':
    case '--help':
      host.out.say(`Gemel analyses photon-pair data from detector arrays.\n${usage}`);
      return verb === undefined ? 2 : 0;
    default:
      throw new Problem('bad-input', `There is no verb "${verb}".\n${usage}`, 'command line');
  }
}
