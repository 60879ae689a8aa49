import * as Comlink from 'comlink';
import { transferablesOf } from '../accumulators/transferables';
import type { ComputeHost } from './compute';

/** The two ends of a compute worker's port. Parts are transferred, progress comes through proxied callbacks. */
export function exposeCompute(host: ComputeHost, endpoint: Comlink.Endpoint): void {
  const exposed: ComputeHost = {
    ...host,
    async count(task, onProgress, askOffset) {
      const outcome = await host.count(task, onProgress, askOffset);
      release(onProgress);
      if (askOffset !== undefined) release(askOffset);
      return outcome.status === 'ok' ? Comlink.transfer(outcome, transferablesOf(outcome.value)) : outcome;
    },
    async findClock(taskId, input, onProgress) {
      const outcome = await host.findClock(taskId, input, onProgress);
      release(onProgress);
      return outcome;
    },
    async fingerprint(taskId, source, onProgress) {
      const outcome = await host.fingerprint(taskId, source, onProgress);
      release(onProgress);
      return outcome;
    },
  };
  Comlink.expose(exposed, endpoint);
}

export function connectCompute(endpoint: Comlink.Endpoint): ComputeHost {
  const remote = Comlink.wrap<ComputeHost>(endpoint);
  return {
    inspect: (source, layout) => remote.inspect(source, layout),
    facts: (input) => remote.facts(input),
    count: (task, onProgress, askOffset) =>
      remote.count(task, Comlink.proxy(onProgress), askOffset && Comlink.proxy(askOffset)),
    findClock: (taskId, input, onProgress) => remote.findClock(taskId, input, Comlink.proxy(onProgress)),
    fingerprint: (taskId, source, onProgress) =>
      remote.fingerprint(taskId, source, Comlink.proxy(onProgress)),
    cancel: (taskId) => remote.cancel(taskId),
  };
}

/** A callback from the other side holds a message port of its own; a long run would collect hundreds. */
function release(callback: object): void {
  if (Comlink.releaseProxy in callback) (callback as Comlink.ProxyMethods)[Comlink.releaseProxy]();
}
