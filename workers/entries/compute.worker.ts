import { createComputeHost } from '../pipeline/compute-host';
import { exposeCompute } from '../pipeline/compute-remote';
import { browserEnvironment } from '../pipeline/hdf5-browser';
import { compileKernels } from '../pipeline/kernels-browser';
import { openBlobSource } from '../pipeline/sources';

/** A compute worker of the page: serves the coordinator through the port it is handed. */
const host = createComputeHost({
  openSource: async (ref) => openBlobSource(ref),
  environment: browserEnvironment,
  compileKernels,
});

self.addEventListener('message', (event: MessageEvent<unknown>) => {
  const message = event.data;
  if (typeof message !== 'object' || message === null || !('port' in message)) return;
  if (message.port instanceof MessagePort) exposeCompute(host, message.port);
});
