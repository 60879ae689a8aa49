/** comlink ships the types of this adapter under another extension than the module itself. */
declare module 'comlink/dist/esm/node-adapter.mjs' {
  import type { Endpoint } from 'comlink';

  interface NodeEndpoint {
    postMessage(message: unknown, transfer?: readonly never[]): void;
    on(type: string, listener: (value: never) => void): unknown;
    off(type: string, listener: (value: never) => void): unknown;
  }
  export default function nodeEndpoint(port: NodeEndpoint): Endpoint;
}
