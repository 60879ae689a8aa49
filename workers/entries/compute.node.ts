import { createHash } from 'node:crypto';
import { parentPort } from 'node:worker_threads';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import { createComputeHost } from '../pipeline/compute-host';
import { exposeCompute } from '../pipeline/compute-remote';
import { nodeEnvironment } from '../pipeline/hdf5-node';
import { compileKernels } from '../pipeline/kernels-node';
import { openPathSource } from '../pipeline/node-source';

/** A compute worker of the command line: the same host as in the page, over file handles. */
if (parentPort === null) throw new Error('compute.node runs as a worker thread only.');
exposeCompute(
  createComputeHost({
    openSource: openPathSource,
    environment: nodeEnvironment,
    compileKernels,
    createSha256: () => createHash('sha256'),
  }),
  nodeEndpoint(parentPort),
);
