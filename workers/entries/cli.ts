import { type NodeEngine, startNodeEngine } from './node-engine';
import { processConsole as out } from './verbs/console';
import { reportFailure, runVerb } from './verbs/dispatch';

/** The command line: JSON on stdout, progress on stderr. Exit codes: see `runVerb`. */
const token = { cancelled: false };
let running: NodeEngine | null = null;

function open(workers: number): NodeEngine {
  running = startNodeEngine(workers, (error) => process.exit(reportFailure(error, out)));
  return running;
}

process.once('SIGINT', () => {
  token.cancelled = true;
  void running?.engine.cancel('run');
  void running?.shards.cancel('run');
});

// Threads would keep the process alive, so it leaves by itself once everything is written.
runVerb(process.argv.slice(2), { out, open, token }).then((code) => process.exit(code));
