import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { benchStateSchema } from '../../../../shared/contracts/http';
import type { CompanionFile } from '../../../../src/features/bench/model/acquisition';
import { isOtherFile, partsOf } from '../../../../src/features/bench/model/acquisition';
import { planRun } from '../../../../src/features/bench/model/bench-selectors';
import { createBenchStore } from '../../../../src/features/bench/model/bench-store';
import { jointFacts, proposeOffset } from '../../../../src/features/bench/model/companion';
import { attachRunner } from '../../../../src/features/bench/model/run-bench';
import { moveFile, sequenceOf, sequenceOffers } from '../../../../src/features/bench/model/sequence';
import { sessionOfBench } from '../../../../src/features/bench/model/session-bench';
import { fakeEngine, fileOf, inspectionOf, outputOf, resultOf, settle, tagsLayout } from './fake-engine';

beforeEach(() => {
  vi.useFakeTimers();
});
afterEach(() => {
  vi.useRealTimers();
});

/** Nine channels a file: one array of 3 x 3, or one of two. */
function nineChannels(name: string) {
  const { facts } = inspectionOf(name);
  if (facts.kind !== 'tags') throw new Error('tags expected');
  const channels = Array.from({ length: 9 }, (_, channel) => ({ channel, count: 50 }));
  return inspectionOf(name, { facts: { ...facts, channels } });
}

async function benchWith(names: readonly string[], look = (name: string) => inspectionOf(name)) {
  const engine = fakeEngine();
  engine.inspection = (name) => ({ status: 'ok', value: look(name) });
  const store = createBenchStore(engine);
  attachRunner(store, engine);
  await store.getState().loadStudies();
  store.getState().addFiles(names.map((name) => ({ file: fileOf(name), sample: null })));
  await settle();
  return { engine, store };
}

const names = (parts: readonly { name: string }[]): string[] => parts.map(({ name }) => name);

describe('files dropped together', () => {
  it('are offered as one acquisition in the order people count, where extension and layout agree', async () => {
    const { store } = await benchWith(['run-10.h5', 'run-2.h5', 'run-1.h5', 'notes.txt']);
    const { shelf, keepApart } = store.getState();
    const [offer, ...others] = sequenceOffers(shelf);
    expect(others).toEqual([]);
    expect(offer?.names).toEqual(['run-1.h5', 'run-2.h5', 'run-10.h5']);
    keepApart(offer!.ids);
    expect(sequenceOffers(store.getState().shelf)).toEqual([]);
    expect(store.getState().shelf).toHaveLength(4);
  });

  it('are not offered while one is looked at, one by one, of other layouts or of other frames', async () => {
    const engine = fakeEngine();
    const store = createBenchStore(engine);
    const frames = (width: number) => ({
      kind: 'frames' as const,
      frames: 9,
      width,
      height: 4,
      type: 'uint16',
      mean: 1,
      max: 2,
      sampled: 9,
    });
    engine.inspection = (name) => {
      const layout = name === 'c.h5' ? { ...tagsLayout, tickFs: 5 } : tagsLayout;
      const facts = name.endsWith('.tif') ? { facts: frames(name === 'a.tif' ? 4 : 8) } : {};
      return { status: 'ok', value: inspectionOf(name, { layout, ...facts }) };
    };
    store
      .getState()
      .addFiles(['a.h5', 'c.h5', 'a.tif', 'b.tif'].map((name) => ({ file: fileOf(name), sample: null })));
    expect(sequenceOffers(store.getState().shelf)).toEqual([]);
    store.getState().addFiles([{ file: fileOf('b.h5'), sample: null }]);
    await settle();
    expect(sequenceOffers(store.getState().shelf)).toEqual([]);
  });
});

describe('one acquisition in several files', () => {
  it('goes to the engine in its order, another order is another run, and its fingerprints find their files', async () => {
    const { engine, store } = await benchWith(['run-2.h5', 'run-1.h5']);
    await vi.advanceTimersByTimeAsync(1);
    const { join, moveFile: move } = store.getState();
    join(sequenceOffers(store.getState().shelf)[0]!.ids);
    await vi.advanceTimersByTimeAsync(1);
    expect(store.getState().shelf).toHaveLength(1);
    const { request } = engine.runs.at(-1)!;
    expect(request.inputs.tags?.source.name).toBe('run-1.h5');
    expect(names(request.inputs.tags?.following ?? [])).toEqual(['run-2.h5']);

    const before = planRun(store.getState());
    const [{ id } = { id: '' }] = store.getState().shelf;
    move(id, 0, 1);
    await settle();
    const after = planRun(store.getState());
    expect(after.inputsKey).not.toBe(before.inputsKey);
    expect(after.request?.inputs.tags?.source.name).toBe('run-2.h5');
    // A file keeps its key wherever it stands: what was counted of it is of its bytes.
    expect(after.request?.inputs.tags?.following?.[0]?.key).toBe(before.request?.inputs.tags?.source.key);

    await vi.advanceTimersByTimeAsync(1);
    const run = engine.runs.at(-1)!;
    const result = resultOf(outputOf(), run.request);
    const [first] = result.provenance.inputs;
    result.provenance.inputs.push({ ...first!, fileName: 'run-1.h5', sha256: 'cd'.repeat(32) });
    run.answer({ status: 'ok', value: result });
    await settle();
    const [whole] = store.getState().shelf;
    expect(partsOf(whole!).map(({ name, sha256 }) => [name, sha256?.slice(0, 2)])).toEqual([
      ['run-2.h5', 'ab'],
      ['run-1.h5', 'cd'],
    ]);
  });

  it('can be taken apart again, every file read as the whole was', async () => {
    const { store } = await benchWith(['a.h5', 'b.h5', 'c.h5']);
    const { join, split } = store.getState();
    join(sequenceOffers(store.getState().shelf)[0]!.ids);
    const [whole] = store.getState().shelf;
    expect(moveFile(whole!, 2, 5)).toBe(whole);
    expect(names(sequenceOf(moveFile(whole!, 2, 0)))).toEqual(['c.h5', 'a.h5', 'b.h5']);
    split(whole!.id);
    await settle();
    const { shelf } = store.getState();
    expect(names(shelf)).toEqual(['a.h5', 'b.h5', 'c.h5']);
    expect(shelf.every((a) => a.following.length === 0 && a.reading.status === 'read')).toBe(true);
    expect(shelf[2]?.detector).toEqual(whole?.detector);
  });
});

const secondClock = (file: File | null): CompanionFile => ({
  name: 'idler.h5',
  bytes: 80,
  file,
  sha256: null,
  expectedSha256: null,
  layout: tagsLayout,
  channelOffset: 9,
  clock: null,
  facts: nineChannels('idler.h5').facts,
});

describe('a second clock', () => {
  it('gets channels past those of the first where they would meet, and none where they are apart', () => {
    const { facts } = inspectionOf('run.h5');
    expect(proposeOffset(facts, facts)).toBe(8);
    if (facts.kind !== 'tags') throw new Error('tags expected');
    const apart = { ...facts, channels: facts.channels.map((c) => ({ ...c, channel: c.channel + 100 })) };
    expect(proposeOffset(facts, apart)).toBe(0);
    expect(proposeOffset(null, facts)).toBe(0);
    const joint = jointFacts(facts, { facts, channelOffset: 8 });
    expect(joint.kind === 'tags' && joint.channels.map(({ channel }) => channel)).toEqual(
      Array.from({ length: 16 }, (_, i) => i),
    );
  });

  it('goes to the engine with its layout and offset, is taken off the shelf, and a map nobody gave is proposed anew', async () => {
    const { store } = await benchWith(['run.h5', 'idler.h5'], nineChannels);
    const [main, other] = store.getState().shelf;
    store.getState().changeCompanion(main!.id, secondClock(other!.file), other!.id);
    expect(names(store.getState().shelf)).toEqual(['run.h5']);
    expect(store.getState().shelf[0]?.detector).toMatchObject({
      signal: { width: 3, firstChannel: 0 },
      idler: { width: 3, firstChannel: 9 },
    });
    const { request, inputsKey } = planRun(store.getState());
    const sent = request?.inputs.tags?.companion;
    expect(sent).toMatchObject({
      source: { name: 'idler.h5' },
      layout: tagsLayout,
      channelOffset: 9,
      clock: null,
    });
    const given = { ...secondClock(other!.file), clock: { offsetPs: 5, drift: 1e-7 } };
    store.getState().changeCompanion(main!.id, given);
    expect(planRun(store.getState()).inputsKey).not.toBe(inputsKey);
    store.getState().changeCompanion(main!.id, null);
    expect(store.getState().shelf[0]?.companion).toBeNull();
    expect(store.getState().shelf[0]?.detector).not.toHaveProperty('idler');
    expect(store.getState().log.at(-1)?.text).toBe('idler.h5 taken off run.h5.');
  });

  it('and a sequence come back with a session, once all of their bytes are here', async () => {
    const { store } = await benchWith(['a.h5', 'b.h5'], nineChannels);
    store.getState().join(sequenceOffers(store.getState().shelf)[0]!.ids);
    const [whole] = store.getState().shelf;
    store
      .getState()
      .changeCompanion(whole!.id, { ...secondClock(fileOf('idler.h5')), sha256: 'ef'.repeat(32) });
    const saved = benchStateSchema.parse(sessionOfBench(store.getState(), 'Monday'));

    const later = createBenchStore(fakeEngine());
    await later.getState().loadStudies();
    later.getState().openSession({ id: 's', name: 'Monday' }, saved);
    const add = async (name: string) => {
      later.getState().addFiles([{ file: fileOf(name), sample: null }]);
      await settle();
    };
    await add('a.h5');
    expect(planRun(later.getState()).needs[0]?.sentence).toContain('Drop b.h5 again');
    await add('idler.h5');
    await add('b.h5');
    expect(later.getState().shelf).toHaveLength(1);
    const plan = planRun(later.getState());
    expect(plan.needs).toEqual([]);
    expect(names(plan.request?.inputs.tags?.following ?? [])).toEqual(['b.h5']);
    expect(plan.request?.inputs.tags?.companion).toMatchObject({ channelOffset: 9, clock: null });
    const [back] = later.getState().shelf;
    const other = { ...back!.companion!, sha256: '01'.repeat(32) };
    expect([isOtherFile(back!), isOtherFile({ ...back!, companion: other })]).toEqual([false, true]);
  });
});
