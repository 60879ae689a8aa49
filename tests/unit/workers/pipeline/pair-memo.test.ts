import { describe, expect, it } from 'vitest';
import type { TagSpec } from '../../../../shared/contracts/tally';
import { PairCache } from '../../../../workers/accumulators/pair-cache';
import { createTagAccumulator } from '../../../../workers/accumulators/tag-accumulator';
import type { BytesKey } from '../../../../workers/pipeline/bytes-key';
import { PairMemo } from '../../../../workers/pipeline/pair-memo';
import { armSpec, tagBlock } from '../accumulators/tag-twin';

const asked: TagSpec = {
  kind: 'tags',
  tickFs: 1000,
  a: armSpec(1, 1, 0),
  b: armSpec(1, 1, 1),
  histogram: { loTick: 0, binTick: 10, bins: 5 },
  window: { loTick: 0, hiTick: 20, shiftsTick: [] },
};

function cache(reachTick: number): PairCache {
  const range = { minTauTick: -reachTick, maxTauTick: reachTick };
  const spec: TagSpec = { ...asked, keepPairs: range };
  const accumulator = createTagAccumulator(spec);
  const tags = [0, 1].map((channel) => ({ tick: BigInt(5 * channel), channel }));
  accumulator.push(tagBlock(tags, 0n));
  return new PairCache(spec, range, accumulator.tally(), accumulator.kept()!);
}

const file = (key: string | undefined, end = 2): BytesKey => ({
  source: { name: 'a', size: 16, key },
  layout: {
    version: 1,
    format: 'hdf5',
    kind: 'tags',
    time: { dataset: 't' },
    channel: { dataset: 'c' },
    tickFs: 1000,
  },
  range: { start: 0, end },
});

describe('pair memo', () => {
  it('answers for the same records alone', () => {
    const memo = new PairMemo(2 ** 20);
    memo.keep(file('one'), cache(100));
    expect(memo.recount(file('one'), asked)?.prompt.pairs[0]).toBe(1);
    for (const other of [file('two'), file('one', 1), file(undefined)]) {
      expect(memo.recount(other, asked)).toBeNull();
    }
    memo.keep(file(undefined), cache(100));
    expect(memo.recount(file(undefined), asked)).toBeNull();
  });

  it('lets the pairs go that were not asked for longest, and says what became of them', () => {
    const { bytes, pairs } = cache(100);
    const memo = new PairMemo(2 * bytes);
    memo.keep(file('one'), cache(100));
    memo.keep(file('two'), cache(100));
    memo.recount(file('one'), asked);
    memo.keep(file('three'), cache(100));
    expect(memo.status(file('one'))).toEqual({ kept: pairs, bytes });
    expect(memo.status(file('two'))).toMatchObject({ kept: null, why: expect.stringContaining('gave way') });
    memo.refuse(file('four'), 'Because.');
    expect(memo.status(file('four'))).toEqual({ kept: null, why: 'Because.' });
  });

  it('does not let a narrower range take the place of a wider one', () => {
    const [wide, narrow] = [cache(400), cache(100)];
    const far: TagSpec = { ...asked, window: { loTick: -400, hiTick: 400, shiftsTick: [] } };
    const memo = new PairMemo(wide.bytes + narrow.bytes);
    memo.keep(file('one'), wide);
    memo.keep(file('one'), narrow);
    expect(memo.recount(file('one'), far)?.prompt.pairs[0]).toBe(1);
    // The narrow one goes when a wide one comes, so that both wide ones find room.
    const both = new PairMemo(2 * wide.bytes);
    for (const [key, pairs] of [
      ['one', narrow],
      ['two', wide],
      ['one', wide],
    ] as const)
      both.keep(file(key), pairs);
    expect(both.recount(file('one'), far)).not.toBeNull();
    expect(both.recount(file('two'), far)).not.toBeNull();
  });
});
