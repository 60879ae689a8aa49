/**
 * Rollovers along the chunks of one input, whoever reads them: the offset at the start of a chunk is that of the chunk
 * before plus the rollovers inside that one. Each chunk tells its own rollovers and learns its offset once all chunks
 * before it have told theirs. Chunks are begun in order and tell before they wait, so the first that is not done never
 * waits for long.
 */
export class OffsetChain {
  readonly #told = new Map<number, bigint>();
  readonly #waiting = new Map<number, (offset: bigint | null) => void>();
  /** The first chunk whose rollovers are not told yet, and the offset at its start. */
  #next = 0;
  #offset = 0n;
  #isStopped = false;

  /** Answers the offset at the start of chunk `index`; null when the run ended before it could be known. */
  ask(index: number, advance: bigint): Promise<bigint | null> {
    if (this.#isStopped) return Promise.resolve(null);
    const answer = new Promise<bigint | null>((resolve) => this.#waiting.set(index, resolve));
    this.#told.set(index, advance);
    for (let told = this.#told.get(this.#next); told !== undefined; told = this.#told.get(this.#next)) {
      this.#told.delete(this.#next);
      this.#waiting.get(this.#next)?.(this.#offset);
      this.#waiting.delete(this.#next);
      this.#offset += told;
      this.#next += 1;
    }
    return answer;
  }

  /** Lets go whoever waits: a chunk failed, or the run was cancelled or is done. */
  stop(): void {
    this.#isStopped = true;
    for (const resolve of this.#waiting.values()) resolve(null);
    this.#waiting.clear();
  }
}
