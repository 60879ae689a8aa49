import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { createEngineDoor } from '../../../../src/lib/workers/engine-client';
import { type EngineSettings, useEngineSettings } from '../../../../src/lib/workers/engine-settings';
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

const defaults: EngineSettings = { workers: null, pairMiB: 512 };
const source = { name: 'run.h5', size: 80, file: fileOf('run.h5') };

describe('the engine of the page', () => {
  it('starts at the first call: one coordinator and a compute worker a core, joined by ports', async () => {
    const door = createEngineDoor(() => defaults);
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
    const door = createEngineDoor(() => defaults);
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

  it('takes other settings at the next call that finds it idle, and holds them to this machine', async () => {
    let settings = defaults;
    const door = createEngineDoor(() => settings);
    const first = door.studies();
    await settle();
    settings = { workers: 1, pairMiB: 64 };
    void door.inspect(source, null);
    await settle();
    // The first call waits for its answer: nothing is taken from under it.
    expect(SilentWorker.all).toHaveLength(4);
    door.restart();
    await first;
    await settle();
    void door.studies();
    await settle();
    expect(SilentWorker.all.slice(4).map(({ options }) => options.name)).toEqual([
      'gemel engine',
      'gemel compute 1',
    ]);
    door.restart();
    await settle();
    settings = { workers: 64, pairMiB: 64 };
    void door.studies();
    await settle();
    expect(SilentWorker.all.slice(6)).toHaveLength(4);
    door.restart();
  });

  it('remembers the settings of each person', () => {
    vi.stubGlobal('window', {});
    const { openFor, change } = useEngineSettings.getState();
    openFor('a');
    change({ workers: 2 });
    openFor('b');
    expect(useEngineSettings.getState().settings).toEqual(defaults);
    openFor('a');
    expect(useEngineSettings.getState().settings).toEqual({ workers: 2, pairMiB: 512 });
  });
});
