import { describe, expect, it } from 'vitest';
import { type BenchState, benchStateSchema } from '../../../../shared/contracts/http';
import type { Plane } from '../../../../shared/contracts/plane';
import { presetSchema } from '../../../../shared/contracts/preset';
import { presetOfBench, presetOfResult } from '../../../../src/features/bench/model/bench-records';
import {
  concernedDials,
  currentAssignment,
  currentDials,
  isReadingChanged,
  linkedResult,
  planRun,
} from '../../../../src/features/bench/model/bench-selectors';
import { createBenchStore } from '../../../../src/features/bench/model/bench-store';
import { sessionOfBench } from '../../../../src/features/bench/model/session-bench';
import {
  fakeEngine,
  fileOf,
  finishDial,
  inspectionOf,
  outputOf,
  resultOf,
  settle,
  tagsLayout,
  witnessInfo,
} from './fake-engine';

const near: Plane = { version: 1, kind: 'near', magnification: { value: 4, sigma: 0.04 } };

const oldSession: BenchState = {
  version: 1,
  study: 'delay',
  preset: { gemel: 1, kind: 'preset', name: 'Monday', study: 'delay', dials: { window: 200 }, inputs: {} },
  shelf: [{ name: 'near.h5', bytes: 80, sha256: 'cd'.repeat(32), input: 'tags', sample: null }],
  seed: 1,
  resultId: 'r1',
};

async function freshBench() {
  const engine = fakeEngine();
  const store = createBenchStore(engine);
  await store.getState().loadStudies();
  return { engine, store };
}

describe('the shelf', () => {
  it('says in a sentence what a study still needs', async () => {
    const { store } = await freshBench();
    expect(planRun(store.getState()).needs[0]?.sentence).toBe(
      'Time tags: an acquisition with time tags is needed.',
    );
    store.getState().chooseStudy('witness');
    store.getState().addFiles([{ file: fileOf('near.h5'), sample: null }]);
    await settle();
    const sentences = planRun(store.getState()).needs.map(({ sentence }) => sentence);
    expect(sentences[0]).toBe('near.h5 needs its plane, the near field, with the calibration.');
    expect(sentences[1]).toContain('The far field: an acquisition');
  });

  it('leaves the others alone when one file cannot be read', async () => {
    const { engine, store } = await freshBench();
    engine.inspection = (name) =>
      name === 'bad.h5'
        ? {
            status: 'error',
            problem: { code: 'not-this-format', message: 'This is text.', place: 'bad.h5, byte 0' },
          }
        : { status: 'ok', value: inspectionOf(name) };
    store.getState().addFiles([
      { file: fileOf('bad.h5'), sample: null },
      { file: fileOf('good.h5'), sample: null },
    ]);
    await settle();
    const { shelf, log } = store.getState();
    expect(shelf[0]?.reading).toMatchObject({ status: 'failed', problem: { message: 'This is text.' } });
    expect(shelf[1]?.layout).toEqual(tagsLayout);
    expect(currentAssignment(store.getState()).tags).toBe(shelf[1]?.id);
    expect(log.some(({ tone, text }) => tone === 'problem' && text.includes('This is text.'))).toBe(true);
  });

  it('assigns near and far by calibration and name, and swaps on request', async () => {
    const { store } = await freshBench();
    store.getState().chooseStudy('witness');
    store.getState().addFiles([
      { file: fileOf('far-2.h5'), sample: null },
      { file: fileOf('near-1.h5'), sample: null },
    ]);
    await settle();
    const [far, close] = store.getState().shelf;
    expect(currentAssignment(store.getState())).toEqual({ near: close?.id, far: far?.id });
    store.getState().assign('near', far!.id);
    expect(currentAssignment(store.getState())).toEqual({ near: far?.id, far: close?.id });
  });

  it('does not run a calibrated study on a pitch nobody gave', async () => {
    const { store } = await freshBench();
    store.getState().chooseStudy('witness');
    store.getState().addFiles([{ file: fileOf('near.h5'), sample: null }]);
    await settle();
    const { id, detector, reading } = store.getState().shelf[0]!;
    if (reading.status !== 'read') throw new Error('not read');
    const change = { layout: tagsLayout, detector, plane: near, inspection: reading.inspection };
    store.getState().changeReading(id, { ...change, detectorGiven: false });
    expect(planRun(store.getState()).needs[0]?.sentence).toContain('pixel pitch');
    store.getState().changeReading(id, { ...change, detectorGiven: true });
    expect(planRun(store.getState()).needs.map(({ sentence }) => sentence)).toEqual([
      'The far field: an acquisition with time tags or frames is needed.',
    ]);
  });
});

describe('presets and sessions', () => {
  it('give their readings to the acquisitions that come, by the name of the input', async () => {
    const { engine, store } = await freshBench();
    const setting = { layout: tagsLayout, detector: null, plane: near };
    store.getState().openSettings(
      {
        study: 'witness',
        dials: {},
        inputs: { near: setting, far: { ...setting, plane: null } },
        seed: 7,
      },
      null,
    );
    store.getState().addFiles([{ file: fileOf('monday-near.h5'), sample: null }]);
    await settle();
    expect(engine.looks).toEqual([{ name: 'monday-near.h5', layout: tagsLayout }]);
    expect(store.getState().shelf[0]).toMatchObject({ plane: near, layoutGiven: true });
    expect(Object.keys(store.getState().waiting)).toEqual(['far']);
    expect(planRun(store.getState()).request).toBeNull();
  });

  it('ask for files of one’s own again, by name and size', async () => {
    const { store } = await freshBench();
    const { addFiles, openSession } = store.getState();
    // As stored before the shelf kept its readings.
    openSession({ id: 's', name: 'Monday' }, oldSession);
    expect(planRun(store.getState()).needs[0]?.sentence).toBe(
      'Drop near.h5 again: its bytes stay on your machine.',
    );
    expect(linkedResult(store.getState())).toBe('r1');
    addFiles([{ file: fileOf('near.h5', 81), sample: null }]);
    await settle();
    expect(store.getState().shelf).toHaveLength(2);
    expect(store.getState().log.some(({ text }) => text.includes('81 bytes'))).toBe(true);
    addFiles([{ file: fileOf('near.h5', 80), sample: null }]);
    await settle();
    expect(store.getState().shelf[0]?.reading.status).toBe('read');
    expect(planRun(store.getState()).request?.dials).toEqual({ window: 200, delay: null });
  });

  it('bring the whole bench back: readings, dials and inputs of every study', async () => {
    const { store } = await freshBench();
    store.getState().addFiles([
      { file: fileOf('far.h5'), sample: null },
      { file: fileOf('near.h5'), sample: null },
      { file: fileOf('spare.h5'), sample: null },
    ]);
    await settle();
    const [far, close, spare] = store.getState().shelf;
    const { detector, reading } = far!;
    if (reading.status !== 'read' || detector?.kind !== 'tags') throw new Error('not read');
    // Corrected by hand, its pitch still unknown: neither a proposal nor a given map.
    const corrected = { ...detector, idler: { ...detector.idler!, flipX: true } };
    const change = { layout: tagsLayout, plane: near, inspection: reading.inspection };
    store.getState().changeReading(far!.id, { ...change, detector: corrected, detectorGiven: false });
    store.getState().turn({ window: 300 });
    store.getState().assign('tags', spare!.id);
    store.getState().chooseStudy('witness');
    store.getState().assign('near', far!.id);
    store.getState().assign('far', null);
    const saved = benchStateSchema.parse(JSON.parse(JSON.stringify(sessionOfBench(store.getState(), 'All'))));

    const again = (await freshBench()).store;
    again.getState().openSession({ id: 's', name: 'All' }, saved);
    again
      .getState()
      .addFiles(['near.h5', 'spare.h5', 'far.h5'].map((name) => ({ file: fileOf(name), sample: null })));
    await settle();
    const state = again.getState();
    expect(state.study).toBe('witness');
    expect(state.shelf.map(({ name }) => name)).toEqual(['far.h5', 'near.h5', 'spare.h5']);
    expect(state.shelf[0]).toMatchObject({ layoutGiven: true, detector: corrected, detectorGiven: false });
    expect(state.shelf[0]?.plane).toEqual(near);
    expect(state.shelf[1]).toMatchObject({ layoutGiven: false, detector: close!.detector, plane: null });
    expect(currentAssignment(state)).toEqual({ near: state.shelf[0]!.id, far: null });
    again.getState().chooseStudy('delay');
    expect(currentAssignment(again.getState())).toEqual({ tags: state.shelf[2]!.id });
    expect(currentDials(again.getState())).toEqual({ window: 300, delay: null });
  });

  it('link a result only as long as nothing was changed since', async () => {
    const { store } = await freshBench();
    store.getState().openSession({ id: 's', name: 'Monday' }, oldSession);
    store.getState().turn({ window: 210 });
    expect(linkedResult(store.getState())).toBeNull();
    store.setState({ saved: { delay: { id: 'r2', key: planRun(store.getState()).key } } });
    expect(linkedResult(store.getState())).toBe('r2');
    expect(sessionOfBench(store.getState(), 'Later').resultId).toBe('r2');
    store.getState().turn({ delay: 10 });
    expect(sessionOfBench(store.getState(), 'Later').resultId).toBeNull();
    store.getState().undo();
    expect(linkedResult(store.getState())).toBe('r2');
  });

  it('are stored in the shape of their contracts, without a proposed pitch', async () => {
    const { store } = await freshBench();
    store.getState().addFiles([{ file: fileOf('run.h5'), sample: 'run.h5' }]);
    await settle();
    store.getState().turn({ window: 300 });
    const preset = presetSchema.parse(presetOfBench(store.getState(), 'Monday', { fixProposals: true }));
    expect(preset.inputs.tags).toEqual({ layout: tagsLayout, detector: null, plane: null });
    expect(preset.dials.window).toBe(300);
    const session = benchStateSchema.parse(sessionOfBench(store.getState(), 'Monday'));
    expect(session.preset.inputs.tags?.layout).toBeNull();
    expect(session.shelf).toMatchObject([
      { name: 'run.h5', bytes: 80, sha256: null, input: 'tags', sample: 'run.h5', layout: null },
    ]);
  });

  it('are named by a result only when dials and reading are theirs', async () => {
    const { store } = await freshBench();
    store.getState().addFiles([{ file: fileOf('run.h5'), sample: null }]);
    await settle();
    const run = () => resultOf(outputOf(), { ...planRun(store.getState()).request!, jobId: 'job' });
    const { id, detector, reading } = store.getState().shelf[0]!;
    if (reading.status !== 'read' || detector?.kind !== 'tags') throw new Error('not read');
    const claim = () => presetOfResult(store.getState(), run());
    const inputs = { tags: { layout: { ...tagsLayout }, detector, plane: near } };
    const ref = { id: 'p', name: 'Monday', version: 1, study: 'delay' as const, dials: {}, inputs };
    store.setState({ preset: ref });
    // The delay study is handed no plane: the preset's says nothing about its result.
    store.setState(({ shelf }) => ({ shelf: shelf.map((a) => ({ ...a, plane: near })) }));
    expect(claim()).toEqual({ name: 'Monday', version: 1 });
    expect(isReadingChanged(store.getState())).toBe(false);
    const change = { layout: tagsLayout, detector, plane: near, inspection: reading.inspection };
    const { signal } = detector;
    store.getState().changeReading(id, {
      ...change,
      detector: { ...detector, signal: { ...signal!, delayPs: 5 } },
      detectorGiven: true,
    });
    expect(claim()).toBeNull();
    expect(isReadingChanged(store.getState())).toBe(true);
    // The same settings in another order of keys are the same.
    const turned = Object.fromEntries(Object.entries(signal!).reverse()) as typeof signal;
    store.getState().changeReading(id, {
      ...change,
      detector: { ...detector, signal: turned },
      detectorGiven: true,
    });
    expect(claim()).toEqual({ name: 'Monday', version: 1 });
    store.getState().turn({ window: 300 });
    expect(claim()).toBeNull();
  });

  it('of a result keep its map, and ask for a pitch it never knew', async () => {
    const { store } = await freshBench();
    store.getState().addFiles([{ file: fileOf('run.h5'), sample: null }]);
    await settle();
    const { detector } = store.getState().shelf[0]!;
    if (detector?.kind !== 'tags') throw new Error('not tags');
    const turned = { ...detector, signal: { ...detector.signal!, flipX: true } };
    const settings = { study: 'delay' as const, dials: {}, seed: 3 };
    const inputs = { tags: { layout: tagsLayout, detector: turned, plane: null } };
    store.getState().openSettings({ ...settings, inputs }, null);
    await settle();
    expect(store.getState().shelf[0]).toMatchObject({ detector: turned, detectorGiven: false });
    expect(planRun(store.getState()).request?.inputs.tags?.detector).toEqual(turned);
    const pitched = {
      ...turned,
      signal: { ...turned.signal, pitchUm: 50 },
      idler: { ...turned.idler!, pitchUm: 50 },
    };
    const given = { tags: { layout: tagsLayout, detector: pitched, plane: near } };
    store.getState().openSettings({ ...settings, inputs: given }, null);
    await settle();
    expect(store.getState().shelf[0]).toMatchObject({ detector: pitched, detectorGiven: true });
  });

  it('show the dials that concern tags or frames, all of them while neither is known', async () => {
    const { engine, store } = await freshBench();
    const dials = [
      finishDial,
      { ...finishDial, id: 'window', for: 'tags' as const },
      { ...finishDial, id: 'blocks', for: 'frames' as const },
    ];
    store.setState({ studies: [{ ...witnessInfo, dials }], study: 'witness' });
    const shown = () => concernedDials(store.getState()).map(({ id }) => id);
    expect(shown()).toEqual(['resamples', 'window', 'blocks']);
    store.getState().addFiles([{ file: fileOf('near.h5'), sample: null }]);
    await settle();
    expect(shown()).toEqual(['resamples', 'window']);
    const stack = { version: 1 as const, format: 'hdf5' as const, kind: 'frames' as const, dataset: '/f' };
    engine.inspection = (name) => ({ status: 'ok', value: inspectionOf(name, { layout: stack }) });
    store.getState().addFiles([{ file: fileOf('far.h5'), sample: null }]);
    await settle();
    expect(shown()).toEqual(['resamples', 'window', 'blocks']);
  });

  it('keep each study’s dials, with one undo a turn', async () => {
    const { store } = await freshBench();
    const { turn, undo, redo, chooseStudy } = store.getState();
    turn({ window: 100 });
    turn({ window: 110 });
    turn({ delay: 40 });
    undo();
    expect(currentDials(store.getState())).toEqual({ window: 110, delay: null });
    undo();
    expect(currentDials(store.getState())).toEqual({ window: null, delay: null });
    redo();
    chooseStudy('witness');
    expect(currentDials(store.getState())).toEqual({});
    chooseStudy('delay');
    expect(currentDials(store.getState()).window).toBe(110);
  });
});
