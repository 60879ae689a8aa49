import type { RunEvent } from '../../shared/contracts/engine';
import type { Outcome } from '../../shared/contracts/outcome';
import { Cancelled, Problem } from '../../shared/errors/problem';
import type { ComputeHost } from './compute';
import type { Pool } from './pool';

/** One run: its flag, the tasks it has in the pool, and where its events go. */
export class Job {
  readonly id: string;
  readonly token = { cancelled: false };
  readonly emit: (event: RunEvent) => void;
  readonly #pool: Pool;
  readonly #running = new Map<string, ComputeHost>();
  #tasks = 0;

  /** A quick one has no tasks, and so nothing to tell. */
  readonly #isQuick: boolean;

  constructor(id: string, pool: Pool, emit: (event: RunEvent) => void, isQuick = false) {
    this.id = id;
    this.#pool = pool;
    this.emit = isQuick ? () => undefined : emit;
    this.#isQuick = isQuick;
  }

  get workers(): number {
    return this.#pool.size;
  }

  cancel(): void {
    this.token.cancelled = true;
    for (const [taskId, host] of this.#running) void host.cancel(taskId);
  }

  checkCancelled(): void {
    if (this.token.cancelled) throw new Cancelled();
  }

  /** Runs one task in the pool and unpacks its answer; a Problem names the input it concerns. */
  async run<T>(input: string, task: (host: ComputeHost, taskId: string) => Promise<Outcome<T>>): Promise<T> {
    if (this.#isQuick) {
      throw new Problem(
        'needs-bytes',
        `A quick answer was asked for, and "${input}" has to be read for it; run the study.`,
        input,
      );
    }
    const taskId = `${this.id}/${this.#tasks++}`;
    const outcome = await this.#pool.run((host) => {
      this.#running.set(taskId, host);
      return task(host, taskId).finally(() => this.#running.delete(taskId));
    }, this.token);
    if (outcome.status === 'ok') return outcome.value;
    if (outcome.status === 'cancelled') throw new Cancelled();
    const { code, message, place } = outcome.problem;
    throw new Problem(code, message, place === null ? input : place);
  }
}
