import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import h5wasm from 'h5wasm/node';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type ResultFile, resultFileSchema } from '../../shared/contracts/result';
import { type NodeEngine, startNodeEngine } from '../../workers/entries/node-engine';
import { writeHdf5 } from '../formats/support/hdf5-writer';
import { verb } from './gemel';

let dir = '';
let engine: NodeEngine;
const crashes: Error[] = [];
const at = (name: string): string => join(dir, name);

beforeAll(async () => {
  dir = mkdtempSync(join(tmpdir(), 'gemel-sequence-'));
  engine = startNodeEngine(2, (error) => crashes.push(error));
  const records = readFileSync('samples/near-tags.bin');
  writeFileSync(at('a.bin'), records.subarray(0, 4 * 100_001));
  writeFileSync(at('b, c.bin'), records.subarray(4 * 100_001));
  writeFileSync(at('b.bin'), records.subarray(4 * 100_001, 4 * 100_002));
  writeFileSync(at('c.bin'), records.subarray(4 * 100_002));
  await h5wasm.ready;
  const tags = new h5wasm.File('samples/near-tags.h5', 'r');
  const column = (name: string): BigUint64Array | Uint16Array => {
    const dataset = tags.get(name);
    if (!(dataset instanceof h5wasm.Dataset)) throw new Error(`${name} is no dataset`);
    return dataset.value as BigUint64Array | Uint16Array;
  };
  const [time, channel] = [column('tags/time'), column('tags/channel')];
  const lines = ['time (ps);channel'];
  for (let i = 0; i < time.length; i += 1) lines.push(`${BigInt(time[i]!) * 10n};${channel[i]}`);
  writeFileSync(at('a.csv'), `${lines.slice(0, 200_001).join('\n')}\n`);
  writeFileSync(at('b.csv'), [lines[0], ...lines.slice(200_001)].join('\r\n'));
  for (const [name, from, to] of [
    ['a.h5', 0, 70_000],
    ['b.h5', 70_000, time.length],
  ] as const) {
    await writeHdf5(at(name), [
      { name: 'tags/time', data: time.slice(from, to) },
      { name: 'tags/channel', data: channel.slice(from, to) },
    ]);
  }
  tags.close();
  const frames = new h5wasm.File('samples/near-frames.h5', 'r');
  const stack = frames.get('camera/frames');
  if (!(stack instanceof h5wasm.Dataset)) throw new Error('no frames');
  for (const [name, from, to] of [
    ['frames-1.h5', 0, 2501],
    ['frames-2.h5', 2501, 6000],
  ] as const) {
    const data = stack.slice([[from, to], [], []]) as Uint8Array;
    await writeHdf5(at(name), [{ name: 'camera/frames', data, shape: [to - from, 48, 48] }]);
  }
  frames.close();
}, 60_000);
afterAll(async () => {
  await engine.close();
  rmSync(dir, { recursive: true, force: true });
  expect(crashes).toEqual([]);
});

async function run(preset: string, input: string): Promise<ResultFile> {
  const answer = await verb(['run', preset, '--input', input], engine);
  expect([0, 3], answer.stderr).toContain(answer.code);
  return resultFileSchema.parse(JSON.parse(answer.stdout));
}

/** What the numbers are, whatever the files are called. */
const numbers = ({ quantities, verdicts, checks, maps, chosen }: ResultFile): unknown => ({
  quantities,
  verdicts,
  checks,
  maps,
  chosen,
});

describe('several files in sequence', () => {
  it('records give the numbers of the joined file, and every file is named', async () => {
    const preset = 'samples/presets/delay-near-records.json';
    const joined = await run(preset, 'tags=samples/near-tags.bin');
    const cut = await run(preset, `tags=${['a.bin', 'b.bin', 'c.bin'].map(at).join(',')}`);
    expect(numbers(cut)).toEqual(numbers(joined));
    const files = cut.provenance.inputs;
    expect(files.map(({ name, fileName }) => [name, fileName])).toEqual([
      ['tags', 'a.bin'],
      ['tags', 'b.bin'],
      ['tags', 'c.bin'],
    ]);
    expect(files.reduce((sum, { bytes }) => sum + bytes, 0)).toBe(joined.provenance.inputs[0]!.bytes);
    expect(new Set(files.map(({ sha256 }) => sha256)).size).toBe(3);
  });

  it('a comma may be part of a name', async () => {
    const result = await run('samples/presets/delay-near-records.json', `tags=${at('b, c.bin')}`);
    expect(result.provenance.inputs.map(({ fileName }) => fileName)).toEqual(['b, c.bin']);
  });

  it('HDF5 and text give the same numbers', async () => {
    const preset = 'samples/presets/delay-near.json';
    const joined = numbers(await run(preset, 'tags=samples/near-tags.h5'));
    expect(numbers(await run(preset, `tags=${at('a.h5')},${at('b.h5')}`))).toEqual(joined);
    const { inputs, ...rest } = JSON.parse(readFileSync(preset, 'utf8'));
    inputs.tags.layout = {
      version: 1,
      format: 'text',
      kind: 'tags',
      delimiter: 'semicolon',
      decimal: 'point',
      headerLines: 1,
      timeColumn: 0,
      channelColumn: 1,
      timeUnitFs: 1000,
      tickFs: 10_000,
    };
    writeFileSync(at('text.json'), JSON.stringify({ ...rest, inputs }));
    expect(numbers(await run(at('text.json'), `tags=${at('a.csv')},${at('b.csv')}`))).toEqual(joined);
  }, 30_000);

  it('frames are one stack, their difference runs on across the border', async () => {
    const preset = 'samples/presets/joint-map-frames.json';
    const joined = await run(preset, 'data=samples/near-frames.h5');
    const cut = await run(preset, `data=${at('frames-1.h5')},${at('frames-2.h5')}`);
    expect(numbers(cut)).toEqual(numbers(joined));
  }, 30_000);

  it('files that do not follow each other, or are not there, are named', async () => {
    const preset = 'samples/presets/delay-near.json';
    const turned = await verb(['run', preset, '--input', `tags=${at('b.h5')},${at('a.h5')}`], engine);
    expect(turned.code).toBe(2);
    expect(turned.stderr).toContain('give them in the order a.h5, b.h5');
    const missing = await verb(['run', preset, '--input', `tags=${at('a.h5')},${at('none.h5')}`], engine);
    expect(missing.code).toBe(2);
    expect(missing.stderr).toContain('none.h5');
    expect(missing.stderr).toContain('there is no such file');
  });
});
