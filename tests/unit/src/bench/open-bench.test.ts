import { QueryClient } from '@tanstack/react-query';
import { describe, expect, it } from 'vitest';
import type { StudyInfo } from '../../../../shared/contracts/study';
import { inOrder } from '../../../../src/features/bench/components/StudyPicker';
import { presetOfResult } from '../../../../src/features/bench/model/bench-records';
import { currentDials } from '../../../../src/features/bench/model/bench-selectors';
import { createBenchStore } from '../../../../src/features/bench/model/bench-store';
import { openWanted, readWanted } from '../../../../src/features/bench/model/open-bench';
import { resultQuery } from '../../../../src/lib/query/results';
import { resultRow } from '../app/fixtures';
import { delayInfo, fakeEngine, witnessInfo } from './fake-engine';

describe('what the address asks for', () => {
  it('is a session, a preset, a result or a sample', () => {
    const read = (text: string) => readWanted(new URLSearchParams(text));
    expect(read('session=s1')).toEqual({ kind: 'session', id: 's1' });
    expect(read('preset=p1&version=2')).toEqual({ kind: 'preset', id: 'p1', version: 2 });
    expect(read('result=r1')).toEqual({ kind: 'result', id: 'r1' });
    expect(read('sample=3')).toEqual({ kind: 'sample', index: 3 });
    expect(read('')).toBeNull();
  });

  it('opens a result with its own dials, readings and seed, without asking what its preset is now', async () => {
    const store = createBenchStore(fakeEngine());
    await store.getState().loadStudies();
    const queries = new QueryClient();
    queries.setQueryData(resultQuery('g1', resultRow.id).queryKey, resultRow);
    await openWanted({ store, queries, groupId: 'g1' }, { kind: 'result', id: resultRow.id });
    const state = store.getState();
    const { dials, inputs, preset, seed } = resultRow.result.provenance;
    expect(state).toMatchObject({ study: resultRow.study, seed });
    expect(currentDials(state).window).toBe(dials.window);
    const [input] = inputs;
    expect(state.waiting[input!.name]).toEqual({
      layout: input!.layout,
      detector: input!.detector,
      plane: input!.plane,
    });
    expect(state.preset).toMatchObject({ name: preset!.name, version: preset!.version, dials });
    const again = { ...resultRow.result, maps: {}, provenance: resultRow.result.provenance };
    expect(presetOfResult(state, { output: again, provenance: again.provenance })).toEqual(preset);
  });

  it('says when a result is of a study this version does not have', async () => {
    const store = createBenchStore(fakeEngine());
    const queries = new QueryClient();
    const later = { ...resultRow, study: 'later', result: { ...resultRow.result, study: 'later' } };
    queries.setQueryData(resultQuery('g1', 'r9').queryKey, later);
    await expect(openWanted({ store, queries, groupId: 'g1' }, { kind: 'result', id: 'r9' })).rejects.toThrow(
      'of a study this version of Gemel does not have (later)',
    );
  });
});

describe('the order of studies', () => {
  it('puts one it does not know last', () => {
    const later = { ...delayInfo, id: 'later' } as unknown as StudyInfo;
    expect(inOrder([later, witnessInfo, delayInfo]).map(({ id }) => id)).toEqual([
      'delay',
      'witness',
      'later',
    ]);
  });
});
