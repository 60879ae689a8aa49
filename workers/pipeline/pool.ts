import { Cancelled } from '../../shared/errors/problem';
import type { ComputeHost } from './compute';

/**
 * Hands tasks to compute workers, one at a time each, in the order asked. A task that waits when its job is cancelled
 * is never started.
 */
export interface Pool {
  readonly size: number;
  run<T>(task: (host: ComputeHost) => Promise<T>, token: { cancelled: boolean }): Promise<T>;
}

interface Waiting {
  start(host: ComputeHost): void;
}

export function createPool(hosts: readonly ComputeHost[]): Pool {
  const idle = [...hosts];
  const queue: Waiting[] = [];

  const release = (host: ComputeHost): void => {
    const next = queue.shift();
    if (next === undefined) idle.push(host);
    else next.start(host);
  };

  return {
    size: hosts.length,
    run: (task, token) =>
      new Promise((resolve, reject) => {
        const start = (host: ComputeHost): void => {
          if (token.cancelled) {
            reject(new Cancelled());
            release(host);
            return;
          }
          task(host)
            .then(resolve, reject)
            .finally(() => release(host));
        };
        const host = idle.pop();
        if (host === undefined) queue.push({ start });
        else start(host);
      }),
  };
}
