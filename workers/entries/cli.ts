import { Problem, toProblemData } from '../../shared/errors/problem';
import { type NodeEngine, startNodeEngine } from './node-engine';
import { processConsole as out } from './verbs/console';
import { inspect, inspectUsage } from './verbs/inspect';
import { run, runUsage } from './verbs/run';
import { simulate, simulateUsage } from './verbs/simulate';
import { listStudies, studiesUsage, template, templateUsage } from './verbs/template';

/**
 * The command line: JSON on stdout, progress on stderr. Exit codes: 0 done, 1 a fault of Gemel's own, 2 bad input (one
 * sentence with the place), 3 done but a check failed, 130 cancelled.
 */
const usage = [studiesUsage, templateUsage, inspectUsage, runUsage, simulateUsage]
  .map((line) => `  npm run --silent gemel -- ${line}`)
  .join('\n');

async function main(argv: readonly string[]): Promise<number> {
  const [verb, ...args] = argv;
  const token = { cancelled: false };
  let running: NodeEngine | null = null;
  const open = (workers: number): NodeEngine => {
    running = startNodeEngine(workers, fail);
    return running;
  };
  process.once('SIGINT', () => {
    token.cancelled = true;
    if (running !== null) void running.engine.cancel('run');
  });
  switch (verb) {
    case 'studies':
      return listStudies(args, out);
    case 'template':
      return template(args, out);
    case 'inspect':
      return inspect(args, open, out);
    case 'run':
      return run(args, open, out);
    case 'simulate':
      return simulate(args, token, out);
    case undefined:
    case 'help':
    case '--help':
      out.say(`Gemel analyses photon-pair data from detector arrays.\n${usage}`);
      return verb === undefined ? 2 : 0;
    default:
      throw new Problem('bad-input', `There is no verb "${verb}".\n${usage}`, 'command line');
  }
}

/** Threads and open files would keep the process alive, so it leaves by itself once everything is written. */
function fail(thrown: unknown): never {
  const problem = toProblemData(thrown);
  out.say(problem.place === null ? problem.message : `${problem.message} [${problem.place}]`);
  process.exit(thrown instanceof Problem ? 2 : 1);
}

main(process.argv.slice(2)).then((code) => process.exit(code), fail);
