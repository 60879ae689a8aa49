import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import type { DialSpec } from '../../../../shared/contracts/dial';
import type { PairsKept } from '../../../../shared/contracts/engine';
import { isOtherFile } from '../../../../src/features/bench/model/acquisition';
import { linkedResult, planRun } from '../../../../src/features/bench/model/bench-selectors';
import { createBenchStore } from '../../../../src/features/bench/model/bench-store';
import type { BenchState } from '../../../../src/features/bench/model/bench-types';
import { attachRunner } from '../../../../src/features/bench/model/run-bench';
import { readingCost } from '../../../../src/features/bench/model/run-cost';
import { costWords } from '../../../../src/features/bench/model/run-words';
import {
  delayInfo,
  type FakeEngine,
  fakeEngine,
  fileOf,
  finishDial,
  outputOf,
  resultOf,
  settle,
} from './fake-engine';

beforeEach(() => {
  vi.useFakeTimers();
});
afterEach(() => {
  vi.useRealTimers();
});

const binDial: DialSpec = {
  id: 'histogram.bin',
  label: 'Bin',
  reason: 'How fine.',
  needs: 'bytes',
  type: 'integer',
  unit: 'ps',
  default: 1,
  min: 1,
  max: 100,
  step: 1,
  auto: false,
};

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

  it('lets a reading under way serve dials that only finish anew', async () => {
    const { engine, store } = await benchWithDials();
    store.getState().turn({ resamples: 200 });
    await vi.advanceTimersByTimeAsync(500);
    expect(engine.runs).toHaveLength(1);
    expect(engine.cancelled).toEqual([]);
    await answer(engine, 0);
    // What was finished is of the dials of its start; the new ones are answered from the counts.
    expect(engine.runs[1]?.request).toMatchObject({ quick: true, dials: { resamples: 200 } });
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

async function benchWithDials(pairs?: PairsKept) {
  const engine = fakeEngine();
  const dials = [
    ...delayInfo.dials.map((spec) => ({ ...spec, needs: 'pairs' as const })),
    finishDial,
    binDial,
  ];
  engine.studies = async () => ({ status: 'ok', value: [{ ...delayInfo, dials }] });
  const store = createBenchStore(engine);
  const runner = attachRunner(store, engine);
  await store.getState().loadStudies();
  store.getState().addFiles([{ file: fileOf('run.h5'), sample: null }]);
  await settle();
  await vi.advanceTimersByTimeAsync(1);
  if (pairs !== undefined) await answer(engine, 0, pairs);
  return { engine, store, runner };
}

async function answer(engine: FakeEngine, index: number, pairs?: PairsKept): Promise<void> {
  const run = engine.runs[index]!;
  const words = `${run.request.quick ? 'look' : 'whole'} at ${run.request.dials.window}`;
  const result = resultOf(outputOf({ statement: words }), run.request);
  run.answer({ status: 'ok', value: pairs === undefined ? result : { ...result, pairs } });
  await settle();
}

const kept: PairsKept = { kept: 5_100_000, bytes: 46e6 };
const shownOf = ({ found }: BenchState) => [found.delay?.output.statement, found.delay?.isPreview];
const sentOf = ({ runs }: FakeEngine) =>
  runs.map(({ request }) => `${request.quick ? 'quick' : 'exact'} ${request.dials.window}`);

describe('dials while the hand moves', () => {
  it('are looked at one at a time, the newest first, and counted exactly once the hand rests', async () => {
    const { engine, store } = await benchWithDials(kept);
    expect(store.getState().log.at(-1)?.text).toBe('Delay done in 1.5 s; 5.1 M pairs kept, 46.0 MB.');
    for (const window of [100, 110, 120, 130]) {
      store.getState().turn({ window });
      await vi.advanceTimersByTimeAsync(20);
    }
    expect(sentOf(engine)).toEqual(['exact null', 'quick 100']);
    await answer(engine, 1);
    expect(shownOf(store.getState())).toEqual(['look at 100', true]);
    expect(store.getState().found.delay?.result).toBeNull();
    expect(sentOf(engine)).toEqual(['exact null', 'quick 100', 'quick 130']);
    await answer(engine, 2);
    expect(shownOf(store.getState())).toEqual(['look at 130', true]);
    await vi.advanceTimersByTimeAsync(200);
    expect(sentOf(engine).at(-1)).toBe('exact 130');
    await answer(engine, 3, kept);
    expect(shownOf(store.getState())).toEqual(['whole at 130', false]);
    await vi.advanceTimersByTimeAsync(1000);
    expect(engine.runs).toHaveLength(4);
    expect(engine.cancelled).toEqual([]);
  });

  it('drop a look that comes after the exact run began, and an exact run that the hand overtakes', async () => {
    const { engine, store } = await benchWithDials(kept);
    store.getState().turn({ window: 100 });
    await vi.advanceTimersByTimeAsync(200);
    expect(sentOf(engine)).toEqual(['exact null', 'quick 100', 'exact 100']);
    expect(engine.cancelled).toEqual([engine.runs[1]?.request.jobId]);
    await answer(engine, 1);
    expect(shownOf(store.getState())).toEqual(['whole at null', false]);
    store.getState().turn({ window: 200 });
    expect(engine.cancelled).toContain(engine.runs[2]?.request.jobId);
    expect(sentOf(engine).at(-1)).toBe('quick 200');
    await answer(engine, 3);
    // Back to where it was: the whole answer is still known.
    store.getState().undo();
    store.getState().undo();
    expect(shownOf(store.getState())).toEqual(['whole at null', false]);
    await vi.advanceTimersByTimeAsync(1000);
    expect(engine.runs).toHaveLength(4);
  });

  it('say what they cost and read again where no pairs were kept', async () => {
    const why = 'The pairs take about 900 MiB, more than the 512 MiB set for them.';
    const { engine, store } = await benchWithDials({ kept: null, why });
    expect(store.getState().log.at(-1)?.text).toBe(`Delay done in 1.5 s. ${why}`);
    store.getState().turn({ window: 100 });
    expect(engine.runs).toHaveLength(1);
    await vi.advanceTimersByTimeAsync(200);
    expect(sentOf(engine)).toEqual(['exact null', 'exact 100']);
    await answer(engine, 1, { kept: null, why });
    // A dial that only finishes anew is looked at all the same.
    store.getState().turn({ resamples: 300 });
    expect(sentOf(engine).at(-1)).toBe('quick 100');
  });

  it('read again when the engine has let the pairs go, and for dials that need the bytes', async () => {
    const { engine, store } = await benchWithDials(kept);
    store.getState().turn({ 'histogram.bin': 3 });
    await vi.advanceTimersByTimeAsync(200);
    expect(sentOf(engine)).toEqual(['exact null', 'exact null']);
    await answer(engine, 1, kept);
    store.getState().turn({ window: 100 });
    const problem = { code: 'needs-bytes' as const, message: 'The pairs are gone.', place: null };
    engine.runs[2]!.answer({ status: 'error', problem });
    await settle();
    expect(store.getState().pairs.delay).toBeNull();
    expect(store.getState().run.status).toBe('done');
    store.getState().turn({ window: 110 });
    await vi.advanceTimersByTimeAsync(200);
    expect(sentOf(engine).slice(2)).toEqual(['quick 100', 'exact 110']);
  });

  it('wait longer where the file is long to read, by the rate of the last reading', async () => {
    const { engine, store } = await benchWithDials();
    const run = engine.runs[0]!;
    const told = { stage: 'reading', counted: 'records' as const, recordsDone: 1, recordsPerSecond: 1 };
    const { jobId } = run.request;
    run.tell({ kind: 'progress', jobId, ...told, bytesDone: 80, bytesTotal: 80, secondsLeft: 0 });
    const result = resultOf(outputOf(), run.request);
    run.answer({ status: 'ok', value: { ...result, provenance: { ...result.provenance, seconds: 10 } } });
    await settle();
    expect(readingCost(store.getState())).toEqual({ bytes: 80, seconds: 10 });
    expect(costWords(readingCost(store.getState()))).toBe('80 bytes, about 10 s');
    store.getState().turn({ window: 100 });
    await vi.advanceTimersByTimeAsync(300);
    expect(engine.runs).toHaveLength(1);
    await vi.advanceTimersByTimeAsync(400);
    expect(engine.runs).toHaveLength(2);
  });
});
