import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { RunEvent, SourceRef } from '../../../../shared/contracts/engine';
import type { ReaderFacts } from '../../../../shared/contracts/reader';
import type { FrameSpec, FrameTally } from '../../../../shared/contracts/tally';
import { Cancelled, Problem } from '../../../../shared/errors/problem';
import { createAccumulator } from '../../../../workers/accumulators/accumulator';
import { encodeNpy } from '../../../../workers/entries/npy';
import { answer } from '../../../../workers/pipeline/answer';
import { planChunks } from '../../../../workers/pipeline/chunks';
import type { ComputeHost } from '../../../../workers/pipeline/compute';
import { Job } from '../../../../workers/pipeline/job';
import { assertFitsMemory, estimateBytes } from '../../../../workers/pipeline/memory';
import { createPool } from '../../../../workers/pipeline/pool';
import { createStage } from '../../../../workers/pipeline/progress';
import { TallyMemo } from '../../../../workers/pipeline/tally-memo';
import { ENGINE_VERSION } from '../../../../workers/pipeline/version';

function idleHost(): ComputeHost {
  const nothing = async (): Promise<never> => {
    throw new Error('not asked for in this test');
  };
  return {
    inspect: nothing,
    facts: nothing,
    count: nothing,
    findClock: nothing,
    fingerprint: nothing,
    cancel: async () => undefined,
  };
}

describe('chunks', () => {
  it('cover every record once, the first one short', () => {
    const facts: ReaderFacts = { kind: 'tags', records: 20_000_001, tickFs: 1000, reader: 'records' };
    const chunks = planChunks(facts);
    expect(chunks[0]).toEqual({ start: 0, end: 2 ** 19 });
    expect(chunks.at(-1)?.end).toBe(20_000_001);
    for (let i = 1; i < chunks.length; i++) expect(chunks[i]!.start).toBe(chunks[i - 1]!.end);
  });

  it('are none where there is nothing', () => {
    expect(planChunks({ kind: 'tags', records: 0, tickFs: 1000, reader: 'records' })).toEqual([]);
  });

  it('hold at least sixteen frames', () => {
    const facts: ReaderFacts = {
      kind: 'frames',
      frames: 40,
      width: 2048,
      height: 2048,
      type: 'uint16',
      reader: 'h5wasm',
    };
    expect(planChunks(facts)).toEqual([
      { start: 0, end: 16 },
      { start: 16, end: 32 },
      { start: 32, end: 40 },
    ]);
  });
});

describe('pool', () => {
  it('gives each worker one task at a time and drops what was cancelled while it waited', async () => {
    const pool = createPool([idleHost(), idleHost()]);
    const token = { cancelled: false };
    let running = 0;
    let most = 0;
    const work = () =>
      pool.run(async () => {
        running += 1;
        most = Math.max(most, running);
        await new Promise((resolve) => setTimeout(resolve, 5));
        running -= 1;
        return true;
      }, token);
    const all = [work(), work(), work(), work(), work()];
    const settled = Promise.allSettled(all);
    await all[0];
    token.cancelled = true;
    const outcomes = await settled;
    expect(outcomes[0]?.status).toBe('fulfilled');
    expect(outcomes[4]).toMatchObject({ status: 'rejected', reason: expect.any(Cancelled) });
    expect(most).toBe(2);
    expect(await pool.run(async () => 'still serving', { cancelled: false })).toBe('still serving');
  });
});

describe('job', () => {
  it('names the input a problem belongs to and stops its tasks', async () => {
    const cancelled: string[] = [];
    const host: ComputeHost = { ...idleHost(), cancel: async (taskId) => void cancelled.push(taskId) };
    const job = new Job('j', createPool([host]), () => undefined);
    const failing = job.run('near', async () => ({
      status: 'error',
      problem: { code: 'truncated', message: 'cut short', place: null },
    }));
    await expect(failing).rejects.toMatchObject({ code: 'truncated', place: 'near' });
    let end: (outcome: { status: 'cancelled' }) => void = () => undefined;
    const waiting = job.run('far', () => new Promise<{ status: 'cancelled' }>((resolve) => (end = resolve)));
    job.cancel();
    expect(cancelled).toEqual(['j/1']);
    end({ status: 'cancelled' });
    await expect(waiting).rejects.toBeInstanceOf(Cancelled);
  });

  it('turns anything thrown into plain data', async () => {
    const thrown = async (what: unknown): Promise<never> => {
      throw what;
    };
    expect(await answer(() => thrown('a string'), 'x.h5')).toEqual({
      status: 'error',
      problem: { code: 'internal', message: 'a string', place: 'x.h5' },
    });
    expect(await answer(() => thrown(new Cancelled()))).toEqual({ status: 'cancelled' });
    expect(await answer(() => thrown(new Problem('bad-dial', 'No.', 'window')), 'x.h5')).toMatchObject({
      problem: { code: 'bad-dial', place: 'window' },
    });
  });
});

describe('progress', () => {
  it('tells rates and the time left once they mean something', () => {
    const events: RunEvent[] = [];
    let now = 0;
    const stage = createStage(
      'j',
      'reading',
      1000,
      (event) => events.push(event),
      'records',
      () => now,
    );
    now = 50;
    stage.add(100, 10);
    now = 1000;
    stage.add(150, 15);
    stage.finish();
    expect(events).toHaveLength(3);
    expect(events[0]).toMatchObject({ bytesDone: 0, secondsLeft: null });
    expect(events[2]).toMatchObject({ bytesDone: 250, recordsPerSecond: 25, secondsLeft: 3 });
    expect(stage.fraction).toBe(0.25);
  });
});

describe('memo of counts', () => {
  const spec: FrameSpec = {
    kind: 'frames',
    width: 2,
    height: 2,
    frames: 3,
    blocks: 20,
    masked: new Uint8Array(4),
  };
  const source: SourceRef = { name: 'a.h5', size: 10, key: 'a 5' };
  const layout = { version: 1, format: 'hdf5', kind: 'frames', dataset: '/f' } as const;
  const range = { start: 0, end: 3 };
  const tally = createAccumulator(spec).tally() as FrameTally;

  it('finds counts of the same bytes and specification only', () => {
    const memo = new TallyMemo();
    const key = { source, layout, spec, range };
    expect(memo.find(key)).toBeNull();
    memo.keep(key, tally);
    expect(memo.find({ ...key, source: { ...source }, spec: { ...spec, masked: new Uint8Array(4) } })).toBe(
      tally,
    );
    expect(memo.find({ ...key, spec: { ...spec, masked: Uint8Array.of(0, 0, 0, 1) } })).toBeNull();
    expect(memo.find({ ...key, source: { ...source, key: 'a 6' } })).toBeNull();
    expect(memo.find({ ...key, range: { start: 0, end: 2 } })).toBeNull();
  });

  it('keeps nothing of a source without a key', () => {
    const memo = new TallyMemo();
    const key = { source: { name: 'a.h5', size: 10 }, layout, spec, range };
    memo.keep(key, tally);
    expect(memo.find(key)).toBeNull();
  });
});

describe('memory', () => {
  const frames = (side: number, blocks: number): FrameSpec => ({
    kind: 'frames',
    width: side,
    height: side,
    frames: 1000,
    blocks,
    masked: new Uint8Array(0),
  });

  it('refuses what a worker cannot hold, with the way out', () => {
    expect(() => assertFitsMemory('near', frames(256, 50))).not.toThrow();
    // Two block maps of 511 x 511 and two whole ones, whatever the kernels take.
    expect(estimateBytes(frames(2048, 50))).toBeGreaterThan(8 * 511 * 511 * 50 + 16 * 4095 * 4095);
    expect(() => assertFitsMemory('near', frames(1024, 50))).not.toThrow();
    expect(() => assertFitsMemory('near', frames(2048, 50))).toThrow(/crop or bin the frames/);
  });
});

describe('NPY', () => {
  // NumPy Enhancement Proposal 1: magic, version 1.0, header length, header ending in a line feed on a multiple of 64.
  it('follows the format', () => {
    const bytes = encodeNpy([2, 3], Float64Array.of(1, 2, 3, 4, 5, 6));
    expect([...bytes.subarray(0, 8)]).toEqual([0x93, 78, 85, 77, 80, 89, 1, 0]);
    const length = bytes[8]! + 256 * bytes[9]!;
    expect((10 + length) % 64).toBe(0);
    const header = new TextDecoder().decode(bytes.subarray(10, 10 + length));
    expect(header).toMatch(/^\{'descr': '<f8', 'fortran_order': False, 'shape': \(2, 3\), \} *\n$/);
    expect(new Float64Array(bytes.slice(10 + length).buffer)[5]).toBe(6);
  });
});

it('calls the engine by the version of the package', () => {
  const packageFile: unknown = JSON.parse(readFileSync('package.json', 'utf8'));
  expect(packageFile).toMatchObject({ version: ENGINE_VERSION });
});
