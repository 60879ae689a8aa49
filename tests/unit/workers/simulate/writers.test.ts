import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import h5wasm, { type Dataset } from 'h5wasm/node';
import { afterAll, describe, expect, it } from 'vitest';
import type { TagScenario } from '../../../../shared/contracts/scenario';
import { Cancelled, Problem } from '../../../../shared/errors/problem';
import { simulateToFile } from '../../../../workers/entries/node-writers';
import { openRecords } from '../../../../workers/formats/records/reader';
import { simulateFrames } from '../../../../workers/simulate/frames';
import { createRecordPacker } from '../../../../workers/simulate/records';
import { simulateTags } from '../../../../workers/simulate/tags';
import { frameScenario, tagScenario } from './scenarios';

const folder = mkdtempSync(join(tmpdir(), 'gemel-writers-'));
afterAll(() => rmSync(folder, { recursive: true }));

/** Comparing bytes: the matcher walks long arrays item by item, for seconds. */
function sameBytes(found: unknown, expected: ArrayBufferView): boolean {
  if (!ArrayBuffer.isView(found)) return false;
  const bytes = (view: ArrayBufferView): Buffer => Buffer.from(view.buffer, view.byteOffset, view.byteLength);
  return found.constructor === expected.constructor && bytes(found).equals(bytes(expected));
}

const quiet = (): void => undefined;
const never = (): boolean => false;

function tagsOf(scenario: TagScenario): { tick: bigint[]; channel: number[] } {
  const tick: bigint[] = [];
  const channel: number[] = [];
  for (const block of simulateTags(scenario)) {
    for (let i = 0; i < block.count; i++) {
      tick.push(block.baseTick + BigInt(block.deltaTick[i]!));
      channel.push(block.channel[i]!);
    }
  }
  return { tick, channel };
}

async function datasetsOf(path: string, names: string[]): Promise<Dataset[]> {
  await h5wasm.ready;
  const file = new h5wasm.File(path, 'r');
  return names.map((name) => file.get(name) as Dataset);
}

describe('the writers', () => {
  it('write tags to HDF5 datasets of the given names', async () => {
    const scenario = tagScenario({
      seconds: 0.4,
      file: { time: '/run/a/when', channel: '/run/where', structure: 'recent' },
    });
    const path = join(folder, 'tags.h5');
    const written = await simulateToFile(scenario, path, quiet, never);
    const expected = tagsOf(scenario);
    expect(written.count).toBe(expected.tick.length);
    // More than one chunk of 65536.
    expect(written.count).toBeGreaterThan(131_072);
    expect(written.bytes).toBe(readFileSync(path).length);
    const [time, channel] = await datasetsOf(path, ['run/a/when', 'run/where']);
    expect(sameBytes(time!.value, BigUint64Array.from(expected.tick))).toBe(true);
    expect(sameBytes(channel!.value, Uint16Array.from(expected.channel))).toBe(true);
    expect(time!.attrs.tick_fs!.value).toBe(10_000);
  });

  it('write frames to HDF5', async () => {
    const scenario = frameScenario({ frames: 300, file: { type: 'uint16', gzip: 0 } });
    const path = join(folder, 'frames.hdf5');
    const written = await simulateToFile(scenario, path, quiet, never);
    const [frames] = await datasetsOf(path, ['camera/frames']);
    expect(frames!.shape).toEqual([300, 48, 48]);
    const expected = new Uint16Array(300 * 48 * 48);
    for (const { firstFrame, pixels } of simulateFrames(scenario)) expected.set(pixels, firstFrame * 48 * 48);
    expect(sameBytes(frames!.value, expected)).toBe(true);
    expect(written).toMatchObject({ kind: 'frames', count: 300, layoutFile: null });
  });

  it.each([4, 8] as const)('write records of %i bytes that the reader gives back', async (recordBytes) => {
    // Few tags: many periods of the short records pass without one.
    const scenario = tagScenario({ seconds: 2, pairsPerSecond: 5000, file: { recordBytes } });
    const path = join(folder, `tags-${recordBytes}.bin`);
    const written = await simulateToFile(scenario, path, quiet, never);
    const bytes = new Uint8Array(readFileSync(path));
    const { layout } = createRecordPacker(recordBytes, scenario.tickFs);
    expect(JSON.parse(readFileSync(written.layoutFile!, 'utf8'))).toEqual(layout);
    const reader = openRecords(
      {
        name: path,
        size: bytes.length,
        ref: { name: path, size: bytes.length, path },
        read: async (start, end) => bytes.slice(start, end),
        close: async () => undefined,
      },
      layout,
    );
    const tick: bigint[] = [];
    const channel: number[] = [];
    const facts = reader.facts;
    const records = facts.kind === 'tags' ? facts.records : 0;
    for await (const block of reader.read({ start: 0, end: records }, 0n, { cancelled: false })) {
      if (block.kind !== 'tags') continue;
      for (let i = 0; i < block.count; i++) {
        tick.push(block.baseTick + BigInt(block.deltaTick[i]!));
        channel.push(block.channel[i]!);
      }
    }
    expect({ tick, channel }).toEqual(tagsOf(scenario));
  });

  it('leave no file when cancelled', async () => {
    for (const name of ['cut.h5', 'cut.bin']) {
      const path = join(folder, name);
      await expect(simulateToFile(tagScenario(), path, quiet, () => true)).rejects.toBeInstanceOf(Cancelled);
      expect(existsSync(path)).toBe(false);
    }
  });

  it('refuse names and folders they cannot use', async () => {
    const cases: [Parameters<typeof simulateToFile>[0], string, RegExp][] = [
      [tagScenario(), join(folder, 'tags.txt'), /\.h5 or \.bin/],
      [frameScenario(), join(folder, 'frames.bin'), /ends in \.h5,/],
      [tagScenario(), join(folder, 'nowhere', 'tags.h5'), /cannot be written/],
      [tagScenario(), join(folder, 'nowhere', 'tags.bin'), /cannot be written/],
      [
        tagScenario({
          idler: { kind: 'array', efficiency: 1, width: 32, height: 32, pitchUm: 50, firstChannel: 256 },
          file: { recordBytes: 4 },
        }),
        join(folder, 'many.bin'),
        /1023/,
      ],
    ];
    for (const [scenario, path, sentence] of cases) {
      const thrown = await simulateToFile(scenario, path, quiet, never).catch((error: unknown) => error);
      expect(thrown).toBeInstanceOf(Problem);
      expect((thrown as Problem).message).toMatch(sentence);
    }
  });
});
