import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { ArrayMap, Detector } from '../../../../shared/contracts/detector';
import type { RunEvent, RunRequest } from '../../../../shared/contracts/engine';
import type { RecordsLayout, Rollover } from '../../../../shared/contracts/layout';
import { createRandom } from '../../../../shared/util/random';
import { type NodeEngine, sourceOfPath, startNodeEngine } from '../../../../workers/entries/node-engine';

/** The whole engine over worker threads on a file long enough for several chunks. */
const RECORDS = 6_000_000;
let dir = '';
let path = '';
let one: NodeEngine;
let two: NodeEngine;
const crashes: Error[] = [];

beforeAll(() => {
  dir = mkdtempSync(join(tmpdir(), 'gemel-engine-'));
  path = join(dir, 'pairs.bin');
  writeFileSync(path, writePairs());
  one = startNodeEngine(1, (error) => crashes.push(error));
  two = startNodeEngine(2, (error) => crashes.push(error));
});
afterAll(async () => {
  await one.close();
  await two.close();
  rmSync(dir, { recursive: true, force: true });
  expect(crashes).toEqual([]);
});

/** 8-byte records: 48 bits of time in ns, 16 of channel; pairs 40 ns apart with a jitter of 3 ns. */
function writePairs(): Uint8Array {
  const random = createRandom(77);
  const words = new Uint32Array(2 * RECORDS);
  let time = 0;
  for (let i = 0; i < RECORDS; i += 2) {
    time += 200 + Math.floor(600 * random.exponential());
    const later = time + 40 + Math.round(3 * random.normal());
    words[2 * i] = time % 2 ** 32;
    words[2 * i + 1] = Math.floor(time / 2 ** 32);
    words[2 * i + 2] = later % 2 ** 32;
    words[2 * i + 3] = Math.floor(later / 2 ** 32) + (1 << 16);
  }
  return new Uint8Array(words.buffer);
}

const pixel = (firstChannel: number): ArrayMap => ({
  width: 1,
  height: 1,
  firstChannel,
  order: 'rows',
  flipX: false,
  flipY: false,
  pitchUm: 50,
  maskedPixels: [],
  delayPs: 0,
  pixelDelayPs: [],
});
const detector: Detector = { version: 1, kind: 'tags', signal: pixel(0), idler: pixel(1) };

function layout(timeBits: number, rollover: Rollover): RecordsLayout {
  return {
    version: 1,
    format: 'records',
    kind: 'tags',
    recordBytes: 8,
    byteOrder: 'little',
    headerBytes: 0,
    time: { firstBit: 0, bits: timeBits },
    channel: { firstBit: 48, bits: 16 },
    rollover,
    skip: [],
    tickFs: 1e6,
  };
}

async function request(jobId: string, how: RecordsLayout): Promise<RunRequest> {
  const source = await sourceOfPath(path);
  return {
    jobId,
    study: 'delay',
    inputs: { tags: { source, layout: how, detector, plane: null } },
    dials: { window: 20_000, 'shift.step': 100_000, 'histogram.range': 1000 },
    seed: 3,
  };
}

describe('engine', () => {
  it('gives the same bits from one worker, from two, and from a counter that rolls over', async () => {
    const looks: RunEvent[] = [];
    const listen = (event: RunEvent): void => {
      if (event.kind === 'partial') looks.push(event);
    };
    const plain = layout(48, { in: 'none' });
    const rolling = layout(24, { in: 'wrap' });
    const alone = await one.engine.run(await request('a', plain), () => undefined);
    const together = await two.engine.run(await request('b', plain), () => undefined);
    const rolled = await two.engine.run(await request('c', rolling), listen);
    if (alone.status !== 'ok' || together.status !== 'ok' || rolled.status !== 'ok') {
      throw new Error(JSON.stringify([alone, together, rolled]));
    }
    expect(alone.value.output.quantities['coincidences.raw']?.n).toBeGreaterThan(RECORDS * 0.49);
    expect(together.value.output).toEqual(alone.value.output);
    expect(rolled.value.output).toEqual(alone.value.output);
    // Maps sharpen while a rolling file is read as well.
    expect(looks.length).toBeGreaterThan(0);
  });

  it('answers from the counts it has when only the finish changes', async () => {
    const asked = await request('d', layout(48, { in: 'none' }));
    const stages: string[] = [];
    const again = await one.engine.run({ ...asked, seed: 4 }, (event) => {
      if (event.kind === 'progress') stages.push(event.stage);
    });
    expect(again.status).toBe('ok');
    expect(stages).toEqual([]);
  });

  it('stops when cancelled and serves the next run', async () => {
    const asked = await request('e', layout(40, { in: 'wrap' }));
    const cancelled = two.engine.run(asked, (event) => {
      if (event.kind === 'progress' && event.bytesDone > 0) void two.engine.cancel('e');
    });
    expect((await cancelled).status).toBe('cancelled');
    const next = await two.engine.run(await request('f', layout(48, { in: 'none' })), () => undefined);
    expect(next.status).toBe('ok');
  });

  it('refuses an input, a kind and a study map that do not fit, naming the place', async () => {
    const asked = await request('g', layout(48, { in: 'none' }));
    const input = asked.inputs.tags!;
    const tries: [RunRequest, string, string][] = [
      [{ ...asked, inputs: {} }, 'missing-input', 'tags'],
      [{ ...asked, inputs: { tags: input, near: input } }, 'bad-input', 'near'],
      [{ ...asked, study: 'ghost-image' }, 'bad-detector', 'detector'],
      [
        {
          ...asked,
          inputs: {
            tags: { ...input, detector: { version: 1, kind: 'frames', pitchUm: 10, maskedPixels: [] } },
          },
        },
        'bad-detector',
        'tags',
      ],
    ];
    for (const [bad, code, place] of tries) {
      const outcome = await one.engine.run(bad, () => undefined);
      expect(outcome).toMatchObject({
        status: 'error',
        problem: { code, place: expect.stringContaining(place) },
      });
    }
  });
});
