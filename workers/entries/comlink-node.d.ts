/** comlink ships the types of this adapter under another extension than the module itself. */
declare module 'comlink/dist/esm/node-adapter.mjs' {
  import type { MessagePort, Worker } from 'node:worker_threads';
  import type { Endpoint } from 'comlink';

  export default function nodeEndpoint(port: MessagePort | Worker): Endpoint;
}
