import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { createEngineDoor } from '../../../../src/lib/workers/engine-client';
import { fileOf, settle } from './fake-engine';

/** Workers that take everything and answer nothing, as a hanging or broken engine does. */
class SilentWorker extends EventTarget {
  static all: SilentWorker[] = [];
  onerror: ((event: { message: string; preventDefault(): void }) => void) | null = null;
  posted: unknown[] = [];
  ended = false;
  constructor(
    readonly url: URL,
    readonly options: { name: string },
  ) {
    super();
    SilentWorker.all.push(this);
  }
  postMessage(message: unknown): void {
    this.posted.push(message);
  }
  terminate(): void {
    this.ended = true;
  }
}

beforeEach(() => {
  SilentWorker.all = [];
  vi.stubGlobal('Worker', SilentWorker);
  vi.stubGlobal('navigator', { hardwareConcurrency: 3 });
});
afterEach(() => {
  vi.unstubAllGlobals();
});

const source = { name: 'run.h5', size: 80, file: fileOf('run.h5') };

describe('the engine of the page', () => {
  it('starts at the first call: one coordinator and a compute worker a core, joined by ports', async () => {
    const door = createEngineDoor();
    expect(SilentWorker.all).toHaveLength(0);
    void door.inspect(source, null);
    await settle();
    expect(SilentWorker.all.map(({ options }) => options.name)).toEqual([
      'gemel engine',
      'gemel compute 1',
      'gemel compute 2',
      'gemel compute 3',
    ]);
    expect(SilentWorker.all[1]!.posted[0]).toMatchObject({ kind: 'port' });
    void door.studies();
    await settle();
    expect(SilentWorker.all).toHaveLength(4);
    door.restart();
  });

  it('answers every waiting call with a sentence when a worker stops, and starts anew when asked', async () => {
    const door = createEngineDoor();
    const [look, studies] = [door.inspect(source, null), door.studies()];
    await settle();
    SilentWorker.all[2]!.onerror?.({ message: 'out of memory', preventDefault: () => undefined });
    for (const outcome of [await look, await studies]) {
      expect(outcome).toMatchObject({
        status: 'error',
        problem: { code: 'internal', message: expect.stringContaining('stopped (out of memory)') },
      });
    }
    expect(SilentWorker.all.every(({ ended }) => ended)).toBe(true);
    // Until it is started again it stays stopped: no call hangs.
    expect((await door.studies()).status).toBe('error');
    door.restart();
    void door.studies();
    await settle();
    expect(SilentWorker.all).toHaveLength(8);
    door.restart();
  });
});
