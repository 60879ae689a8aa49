import * as Comlink from 'comlink';
import type { Engine, EngineHost } from '../../shared/contracts/engine';
import { Problem } from '../../shared/errors/problem';
import { connectCompute } from '../pipeline/compute-remote';
import { createEngine } from '../pipeline/engine';
import { withTransfers } from '../pipeline/engine-remote';
import { compileKernels } from '../pipeline/kernels-browser';
import { studies } from '../studies/registry';

/** The coordinating worker of the page. It must be attached to its compute workers before anything else. */
let engine: Engine | null = null;

function attached(): Engine {
  if (engine === null) throw new Problem('internal', 'The engine was used before its workers were attached.');
  return engine;
}

const host: EngineHost = {
  async attach(ports, options) {
    const hosts = ports.filter((port) => port instanceof MessagePort).map(connectCompute);
    engine = createEngine(hosts, options, compileKernels);
  },
  studies: async () => Object.values(studies).map((study) => study.info),
  inspect: (source, layout) => attached().inspect(source, layout),
  run: (request, onEvent) => attached().run(request, onEvent),
  cancel: (jobId) => attached().cancel(jobId),
};

Comlink.expose(withTransfers(host));
