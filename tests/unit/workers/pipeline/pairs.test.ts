import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Detector } from '../../../../shared/contracts/detector';
import type { DialValues } from '../../../../shared/contracts/dial';
import type { EngineOptions, RunRequest, RunResult } from '../../../../shared/contracts/engine';
import type { RecordsLayout } from '../../../../shared/contracts/layout';
import { createRandom } from '../../../../shared/util/random';
import { type NodeEngine, sourceOfPath, startNodeEngine } from '../../../../workers/entries/node-engine';
import { arrayMap } from '../../../support/run-study';

/** Dials answered from kept pairs, on a file of several chunks, against an engine that reads it every time. */
const RECORDS = 2_200_000;
let dir = '';
let path = '';
const engines: NodeEngine[] = [];
const crashes: Error[] = [];
let reading: NodeEngine;

function start(options?: EngineOptions): NodeEngine {
  const engine = startNodeEngine(1, (error) => crashes.push(error), options);
  engines.push(engine);
  return engine;
}

beforeAll(() => {
  dir = mkdtempSync(join(tmpdir(), 'gemel-pairs-'));
  path = join(dir, 'pairs.bin');
  writeFileSync(path, writePairs());
  reading = start();
});
afterAll(async () => {
  for (const engine of engines) await engine.close();
  rmSync(dir, { recursive: true, force: true });
  expect(crashes).toEqual([]);
});

/** 8-byte records: 48 bits of ns, 16 of channel; two arrays of 2 x 2, pairs 40 ns apart with a jitter of 3 ns. */
function writePairs(): Uint8Array {
  const random = createRandom(78);
  const words = new Uint32Array(2 * RECORDS);
  let time = 0;
  for (let i = 0; i < RECORDS; i += 2) {
    time += 200 + Math.floor(2000 * random.exponential());
    const later = time + 40 + Math.round(3 * random.normal());
    words[2 * i] = time % 2 ** 32;
    words[2 * i + 1] = Math.floor(time / 2 ** 32) + (random.below(4) << 16);
    words[2 * i + 2] = later % 2 ** 32;
    words[2 * i + 3] = Math.floor(later / 2 ** 32) + ((4 + random.below(4)) << 16);
  }
  return new Uint8Array(words.buffer);
}

const layout: RecordsLayout = {
  version: 1,
  format: 'records',
  kind: 'tags',
  recordBytes: 8,
  byteOrder: 'little',
  headerBytes: 0,
  time: { firstBit: 0, bits: 48 },
  channel: { firstBit: 48, bits: 16 },
  rollover: { in: 'none' },
  skip: [],
  tickFs: 1e6,
};
const dials: DialValues = { 'histogram.range': 400, 'shift.step': 100_000, 'shift.count': 4 };

function detector(masked: number[]): Detector {
  const signal = { ...arrayMap(2, 2, 0), maskedPixels: masked };
  return { version: 1, kind: 'tags', signal, idler: arrayMap(2, 2, 4) };
}

async function ask(given: DialValues, masked: number[] = []): Promise<RunRequest> {
  const source = await sourceOfPath(path);
  const input = { source, layout, detector: detector(masked), plane: null };
  return { jobId: 'a', study: 'delay', inputs: { tags: input }, dials: { ...dials, ...given }, seed: 3 };
}

async function run(
  engine: NodeEngine,
  request: RunRequest,
): Promise<{ result: RunResult; stages: string[] }> {
  const stages: string[] = [];
  const outcome = await engine.engine.run(request, (event) => {
    if (event.kind === 'progress') stages.push(event.stage);
  });
  if (outcome.status !== 'ok') throw new Error(JSON.stringify(outcome));
  return { result: outcome.value, stages };
}

describe('kept pairs', () => {
  it('answer windows, shifts, histograms and masks as reading does, without reading', async () => {
    const keeping = start({});
    const first = await run(keeping, await ask({}));
    expect(first.stages).toContain('tags: reading');
    expect(first.result.pairs?.kept).toBeGreaterThan(RECORDS / 2);
    const turns: [DialValues, number[]][] = [
      [{}, []],
      [{ delay: 45_000 }, []],
      [{ delay: 45_000, window: 9000, 'shift.step': 110_000, 'shift.count': 7 }, []],
      [{ 'histogram.range': 300, 'histogram.bin': 5000 }, []],
      [{ window: 15_000 }, [1, 2]],
    ];
    for (const [given, masked] of turns) {
      const request = await ask(given, masked);
      const quick = await keeping.engine.run({ ...request, quick: true }, () => undefined);
      expect(quick).toMatchObject({ status: 'ok' });
      const fromPairs = await run(keeping, request);
      expect(fromPairs.stages).toEqual([]);
      expect(fromPairs.result.output).toEqual((await run(reading, request)).result.output);
    }
  });

  it('say that the bytes are needed for a quick answer they do not tell', async () => {
    const keeping = start({});
    const unread = { ...(await ask({})), quick: true };
    expect(await keeping.engine.run(unread, () => undefined)).toMatchObject({
      status: 'error',
      problem: { code: 'needs-bytes', place: 'tags' },
    });
    await run(keeping, await ask({ window: 20_000 }));
    const beyond = { ...(await ask({ delay: 3e6 })), quick: true };
    expect(await keeping.engine.run(beyond, () => undefined)).toMatchObject({
      status: 'error',
      problem: { code: 'needs-bytes' },
    });
  });

  it('give way to the windows asked for when they do not fit, with a sentence', async () => {
    const small = start({ pairBytes: 2 ** 20 });
    const request = await ask({ window: 20_000, delay: 40_000 });
    const { result } = await run(small, request);
    expect(result.pairs).toMatchObject({
      kept: null,
      why: expect.stringContaining('more than the 1 MiB set for them'),
    });
    const read = (await run(reading, request)).result;
    expect(result.output).toEqual(read.output);
    expect(read.pairs).toEqual({ kept: null, why: 'Keeping pairs is switched off.' });
  });
});
