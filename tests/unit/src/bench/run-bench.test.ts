import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { isOtherFile } from '../../../../src/features/bench/model/acquisition';
import { linkedResult, planRun } from '../../../../src/features/bench/model/bench-selectors';
import { createBenchStore } from '../../../../src/features/bench/model/bench-store';
import { attachRunner } from '../../../../src/features/bench/model/run-bench';
import { delayInfo, fakeEngine, fileOf, finishDial, outputOf, resultOf, settle } from './fake-engine';

beforeEach(() => {
  vi.useFakeTimers();
});
afterEach(() => {
  vi.useRealTimers();
});

async function benchWithTags() {
  const engine = fakeEngine();
  const store = createBenchStore(engine);
  const runner = attachRunner(store, engine);
  await store.getState().loadStudies();
  store.getState().addFiles([{ file: fileOf('run.h5'), sample: null }]);
  await settle();
  await vi.advanceTimersByTimeAsync(1);
  return { engine, store, runner };
}

describe('a run', () => {
  it('starts at once when a file is dropped and the study has all it needs', async () => {
    const { engine, store } = await benchWithTags();
    expect(engine.runs).toHaveLength(1);
    const { request } = engine.runs[0]!;
    expect(request.study).toBe('delay');
    expect(request.dials).toEqual({ window: null, delay: null });
    expect(request.inputs.tags?.detector).toMatchObject({
      kind: 'tags',
      signal: { width: 2, firstChannel: 0 },
    });
    expect(store.getState().run).toMatchObject({ status: 'running', progress: null });
  });

  it('shows partial output, then the final one with its provenance and the fingerprint of the file', async () => {
    const { engine, store } = await benchWithTags();
    const run = engine.runs[0]!;
    run.tell({ kind: 'partial', jobId: run.request.jobId, output: outputOf(), fraction: 0.4 });
    expect(store.getState().found.delay).toMatchObject({ fraction: 0.4, result: null });
    run.answer({ status: 'ok', value: resultOf(outputOf(), run.request) });
    await settle();
    expect(store.getState().found.delay?.fraction).toBeNull();
    expect(store.getState().run).toMatchObject({ status: 'done', seconds: 1.5 });
    expect(store.getState().shelf[0]?.sha256).toBe('ab'.repeat(32));
    await vi.advanceTimersByTimeAsync(1000);
    expect(engine.runs).toHaveLength(1);
  });

  it('waits while a dial is being turned, and the newest request wins', async () => {
    const { engine, store } = await benchWithTags();
    const first = engine.runs[0]!;
    first.answer({ status: 'ok', value: resultOf(outputOf(), first.request) });
    await settle();
    for (const window of [100, 200, 300]) {
      store.getState().turn({ window });
      await vi.advanceTimersByTimeAsync(60);
    }
    expect(engine.runs).toHaveLength(1);
    await vi.advanceTimersByTimeAsync(200);
    expect(engine.runs).toHaveLength(2);
    expect(engine.runs[1]?.request.dials.window).toBe(300);

    store.getState().turn({ window: 400 });
    await vi.advanceTimersByTimeAsync(200);
    expect(engine.runs).toHaveLength(3);
    expect(engine.cancelled).toEqual([engine.runs[1]?.request.jobId]);
    // The older answer comes late and changes nothing.
    const late = outputOf({ statement: 'late' });
    engine.runs[1]!.answer({ status: 'ok', value: resultOf(late, engine.runs[1]!.request) });
    await settle();
    expect(store.getState().found.delay?.output.statement).toBe('Counted in a window.');
  });

  it('answers dials that only finish anew while the hand moves, one at a time', async () => {
    const engine = fakeEngine();
    const info = { ...delayInfo, dials: [...delayInfo.dials, finishDial] };
    engine.studies = async () => ({ status: 'ok', value: [info] });
    const store = createBenchStore(engine);
    attachRunner(store, engine);
    await store.getState().loadStudies();
    store.getState().addFiles([{ file: fileOf('run.h5'), sample: null }]);
    await settle();
    await vi.advanceTimersByTimeAsync(1);
    // Turned while the file is read: the reading goes on and serves it.
    store.getState().turn({ resamples: 200 });
    await vi.advanceTimersByTimeAsync(500);
    expect(engine.runs).toHaveLength(1);
    expect(engine.cancelled).toEqual([]);
    const answer = async (index: number): Promise<void> => {
      const run = engine.runs[index]!;
      run.answer({ status: 'ok', value: resultOf(outputOf(), run.request) });
      await settle();
      await vi.advanceTimersByTimeAsync(1);
    };
    await answer(0);
    expect(engine.runs[1]?.request.dials.resamples).toBe(200);
    await answer(1);
    await vi.advanceTimersByTimeAsync(1000);
    // The first move starts at once, those during its answer wait for it, the newest of them follows.
    for (const resamples of [300, 400, 500]) {
      store.getState().turn({ resamples });
      await vi.advanceTimersByTimeAsync(20);
    }
    expect(engine.runs).toHaveLength(3);
    expect(engine.runs[2]?.request.dials.resamples).toBe(300);
    await answer(2);
    await vi.advanceTimersByTimeAsync(100);
    expect(engine.runs).toHaveLength(4);
    expect(engine.runs[3]?.request.dials.resamples).toBe(500);
    expect(engine.cancelled).toEqual([]);
    // A dial that counts anew still waits for the hand to rest, and the newest wins.
    store.getState().turn({ window: 300 });
    await vi.advanceTimersByTimeAsync(100);
    expect(engine.runs).toHaveLength(4);
    await vi.advanceTimersByTimeAsync(100);
    expect(engine.runs).toHaveLength(5);
    expect(engine.cancelled).toEqual([engine.runs[3]?.request.jobId]);
  });

  it('keeps what was found when the run fails or is cancelled, and does not start again by itself', async () => {
    const { engine, store, runner } = await benchWithTags();
    const first = engine.runs[0]!;
    first.answer({ status: 'ok', value: resultOf(outputOf(), first.request) });
    await settle();
    store.getState().turn({ window: 50 });
    await vi.advanceTimersByTimeAsync(200);
    const problem = { code: 'truncated' as const, message: 'The file ends early.', place: 'run.h5, byte 80' };
    engine.runs[1]!.answer({ status: 'error', problem });
    await settle();
    expect(store.getState().run).toMatchObject({ status: 'failed', problem });
    expect(store.getState().found.delay?.output.statement).toBe('Counted in a window.');
    expect(store.getState().found.delay?.key).not.toBe(planRun(store.getState()).key);
    await vi.advanceTimersByTimeAsync(1000);
    expect(engine.runs).toHaveLength(2);
    runner.again();
    expect(engine.runs).toHaveLength(3);
    runner.cancel();
    expect(store.getState().run.status).toBe('cancelled');
    expect(engine.cancelled).toContain(engine.runs[2]!.request.jobId);
    expect(store.getState().log.at(-1)?.text).toContain('kept');
  });

  it('is not repeated when an undo leads back to what is already known', async () => {
    const { engine, store } = await benchWithTags();
    const first = engine.runs[0]!;
    first.answer({ status: 'ok', value: resultOf(outputOf(), first.request) });
    await settle();
    store.getState().turn({ window: 50 });
    store.getState().undo();
    await vi.advanceTimersByTimeAsync(1000);
    expect(engine.runs).toHaveLength(1);
    expect(store.getState().run.status).toBe('done');
  });

  it('says when a file is not the one the session was made with, and drops the link to its result', async () => {
    const engine = fakeEngine();
    const store = createBenchStore(engine);
    attachRunner(store, engine);
    await store.getState().loadStudies();
    const entry = (name: string, sha256: string, input: string | null) => ({
      name,
      bytes: 80,
      sha256,
      input,
      sample: null,
    });
    store.getState().openSession(
      { id: 's', name: 'Monday' },
      {
        version: 1,
        study: 'delay',
        preset: { gemel: 1, kind: 'preset', name: 'Monday', study: 'delay', dials: {}, inputs: {} },
        shelf: [entry('run.h5', 'cd'.repeat(32), 'tags'), entry('run.h5', 'ef'.repeat(32), null)],
        seed: 1,
        resultId: 'r1',
      },
    );
    store.getState().addFiles([
      { file: fileOf('run.h5'), sample: null },
      { file: fileOf('run.h5'), sample: null },
    ]);
    await settle();
    await vi.advanceTimersByTimeAsync(1);
    expect(linkedResult(store.getState())).toBe('r1');
    expect(store.getState().saved.delay?.key).toBe(planRun(store.getState()).key);
    const run = engine.runs[0]!;
    run.answer({ status: 'ok', value: resultOf(outputOf(), run.request) });
    await settle();
    const { shelf, log } = store.getState();
    // The other file of that name and size was not read.
    expect(shelf.map(isOtherFile)).toEqual([true, false]);
    expect(log.filter(({ text }) => text.includes('not the file the session was made with'))).toHaveLength(1);
    expect(linkedResult(store.getState())).toBeNull();
  });
});
