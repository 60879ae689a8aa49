import { proxy, type Remote, transfer, wrap } from 'comlink';
import type { EngineHost } from '../../../shared/contracts/engine';
import type { Outcome } from '../../../shared/contracts/outcome';
import { toProblemData } from '../../../shared/errors/problem';
import type { EngineDoor } from './engine-door';
import { type EngineSettings, useEngineSettings, workerCount } from './engine-settings';

const BYTES_PER_MIB = 2 ** 20;

interface Link {
  /** What it was started with. */
  settings: EngineSettings;
  host: Remote<EngineHost>;
  /** Resolves, with the outcome every waiting call gets, only when a worker stops. */
  failed: Promise<Outcome<never>>;
  stop(sentence: string): void;
}

function startLink(settings: EngineSettings): Link {
  const coordinator = new Worker(new URL('../../../workers/entries/engine.worker.ts', import.meta.url), {
    type: 'module',
    name: 'gemel engine',
  });
  const hands = Array.from(
    { length: workerCount(settings) },
    (_, i) =>
      new Worker(new URL('../../../workers/entries/compute.worker.ts', import.meta.url), {
        type: 'module',
        name: `gemel compute ${i + 1}`,
      }),
  );
  const everyone = [coordinator, ...hands];
  let fail: (outcome: Outcome<never>) => void = () => undefined;
  const failed = new Promise<Outcome<never>>((resolve) => {
    fail = resolve;
  });
  const stop = (message: string): void => {
    for (const worker of everyone) worker.terminate();
    fail({ status: 'error', problem: { code: 'internal', message, place: null } });
  };
  for (const worker of everyone) {
    worker.onerror = (event) => {
      event.preventDefault();
      const cause = event.message ? ` (${event.message})` : '';
      stop(`The engine stopped${cause}. Start it again; the acquisitions on the shelf are kept.`);
    };
  }
  const host = wrap<EngineHost>(coordinator);
  const ports = hands.map((worker) => {
    const channel = new MessageChannel();
    worker.postMessage({ kind: 'port', port: channel.port1 }, [channel.port1]);
    return channel.port2;
  });
  const options = { pairBytes: settings.pairMiB * BYTES_PER_MIB };
  host.attach(transfer(ports, ports), options).catch((thrown: unknown) => {
    stop(`The engine could not reach its compute workers: ${toProblemData(thrown).message} Start it again.`);
  });
  return { settings, host, failed, stop };
}

/**
 * Starts the workers at the first call; one engine serves the page. Other settings start it anew, at the next call that
 * finds it idle: a run under way goes on as it began.
 */
export function createEngineDoor(readSettings: () => EngineSettings): EngineDoor {
  let link: Link | null = null;
  let waiting = 0;
  const restart = (): void => {
    link?.stop('The engine was started again before this was done.');
    link = null;
  };
  const call = async <T>(ask: (host: Remote<EngineHost>) => Promise<Outcome<T>>): Promise<Outcome<T>> => {
    const settings = readSettings();
    if (waiting === 0 && link !== null && link.settings !== settings) restart();
    waiting += 1;
    try {
      link ??= startLink(settings);
      const current = link;
      const outcome = await Promise.race([ask(current.host), current.failed.then((o): Outcome<T> => o)]);
      return outcome;
    } catch (thrown) {
      return { status: 'error', problem: toProblemData(thrown) };
    } finally {
      waiting -= 1;
    }
  };
  return {
    studies: () => call(async (host) => ({ status: 'ok', value: await host.studies() })),
    inspect: (source, layout) => call((host) => host.inspect(source, layout)),
    run: (request, onEvent) => call((host) => host.run(request, proxy(onEvent))),
    cancel: (jobId) => {
      // A cancel that cannot be delivered has nothing left to cancel: `run` already answers with the failure.
      void call(async (host) => ({ status: 'ok', value: await host.cancel(jobId) }));
    },
    restart,
  };
}

let door: EngineDoor | null = null;

export function getEngine(): EngineDoor {
  door ??= createEngineDoor(() => useEngineSettings.getState().settings);
  return door;
}
