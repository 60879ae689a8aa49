import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type ResultFile, resultFileSchema } from '../../shared/contracts/result';
import { createRandom } from '../../shared/util/random';
import { type NodeEngine, startNodeEngine } from '../../workers/entries/node-engine';
import { recordsLayout } from '../formats/support/record-writer';
import { verb } from './gemel';

/** Two taggers of ticks of 10 ps: the second was started 0.3 s later, as the main clock counts, and runs 3 ppm slow. */
const offsetPs = 0.3e12;
const drift = 3e-6;
const layout = recordsLayout({ tickFs: 10_000 });
const seconds = 20;
const pairRate = 2000;

let dir = '';
let engine: NodeEngine;
const crashes: Error[] = [];
const at = (name: string): string => join(dir, name);

beforeAll(() => {
  dir = mkdtempSync(join(tmpdir(), 'gemel-clocks-'));
  engine = startNodeEngine(2, (error) => crashes.push(error));
  const random = createRandom(11);
  const signal: number[] = [];
  const idler: number[] = [];
  const poisson = (rate: number, happen: (ps: number) => void): void => {
    for (let t = 0; t < seconds * 1e12; t += (random.exponential() * 1e12) / rate) happen(t);
  };
  poisson(8000, (t) => signal.push(t));
  poisson(12_000, (t) => idler.push(t));
  poisson(pairRate, (t) => {
    signal.push(t + 200 * random.normal());
    idler.push(t + 200 * random.normal());
  });
  const tags = (times: readonly number[], channel: number) =>
    times.filter((ps) => ps >= 0).map((ps) => ({ tick: Math.round(ps / 10), channel }));
  // The second tagger's clock has no negative times: what came before it was started is not there.
  const second = idler.map((ps) => (ps - offsetPs) / (1 + drift));
  write('one-clock.bin', [
    ...tags(signal, 0),
    ...tags(
      idler.filter((_, i) => second[i]! >= 0),
      1,
    ),
  ]);
  write('main.bin', tags(signal, 0));
  write('second.bin', tags(second, 0));
  write('few.bin', tags([1e12, 2e12, 3e12], 0));
  const pixel = (firstChannel: number) => ({
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
  const preset = (companion?: unknown) => ({
    gemel: 1,
    kind: 'preset',
    name: 'two clocks',
    study: 'delay',
    inputs: {
      tags: { layout, detector: { version: 1, kind: 'tags', signal: pixel(0), idler: pixel(1) }, companion },
    },
  });
  writeFileSync(at('found.json'), JSON.stringify(preset({ channelOffset: 1 })));
  writeFileSync(at('given.json'), JSON.stringify(preset({ channelOffset: 1, clock: { offsetPs, drift } })));
});
afterAll(async () => {
  await engine.close();
  rmSync(dir, { recursive: true, force: true });
  expect(crashes).toEqual([]);
});

function write(name: string, tags: { tick: number; channel: number }[]): void {
  const words = new Uint32Array(2 * tags.length);
  tags
    .sort((a, b) => a.tick - b.tick)
    .forEach(({ tick, channel }, i) => {
      words[2 * i] = tick % 2 ** 32;
      words[2 * i + 1] = Math.floor(tick / 2 ** 32) + channel * 2 ** 16;
    });
  writeFileSync(at(name), new Uint8Array(words.buffer));
}

async function run(preset: string, ...args: string[]): Promise<ResultFile> {
  const answer = await verb(['run', at(preset), ...args], engine);
  expect([0, 3], answer.stderr).toContain(answer.code);
  return resultFileSchema.parse(JSON.parse(answer.stdout));
}

describe('two files of two clocks', () => {
  it('give the coincidences of one clock once offset and drift are found', async () => {
    const one = await run('found.json', '--input', `tags=${at('one-clock.bin')}`);
    expect(one.quantities['clock.offset']).toBeUndefined();
    const two = await run(
      'found.json',
      '--input',
      `tags=${at('main.bin')}`,
      '--second',
      `tags=${at('second.bin')}`,
    );
    const { 'clock.offset': offset, 'clock.drift': rate } = two.quantities;
    expect(Math.abs(offset!.value! - offsetPs)).toBeLessThan(5 * offset!.sigma!);
    expect(Math.abs(rate!.value! - drift)).toBeLessThan(5 * rate!.sigma!);
    expect(rate!.sigma!).toBeLessThan(1e-11);
    expect(two.checks.find(({ id }) => id === 'clock-line')?.status).toBe('pass');
    const [net, wanted] = [two, one].map(({ quantities }) => quantities['coincidences.net']!);
    // The same pairs, a little differently rounded: far closer than two independent counts.
    expect(Math.abs(net!.value! - wanted!.value!)).toBeLessThan(wanted!.sigma!);
    expect(two.quantities['delay.sigma']!.value! / one.quantities['delay.sigma']!.value!).toBeCloseTo(1, 1);
    expect(Math.abs(two.quantities['delay.peak']!.value!)).toBeLessThan(20);
    expect(two.provenance.inputs.map(({ name, fileName }) => [name, fileName])).toEqual([
      ['tags', 'main.bin'],
      ['tags', 'second.bin'],
    ]);
  }, 120_000);

  it('are read by a clock that is given, without errors of its own', async () => {
    const given = await run(
      'given.json',
      '--input',
      `tags=${at('main.bin')}`,
      '--second',
      `tags=${at('second.bin')}`,
    );
    expect(given.quantities['clock.offset']).toMatchObject({ value: offsetPs, sigma: null });
    expect(given.quantities['clock.drift']).toMatchObject({ value: drift, sigma: null });
    // The window keeps two sigma on either side, erf(sqrt 2), and the second file lacks what came before it was started.
    const wanted = pairRate * 0.9545 * (1 - offsetPs / (seconds * 1e12));
    const net = given.quantities['coincidences.net']!;
    expect(Math.abs(net.value! - wanted)).toBeLessThan(5 * net.sigma!);
  }, 60_000);

  it('without coincidences get no number', async () => {
    const input = ['--input', `tags=${at('main.bin')}`, '--second', `tags=${at('few.bin')}`];
    const answer = await verb(['run', at('found.json'), ...input], engine);
    expect(answer.code).toBe(2);
    expect(answer.stderr).toContain('Expected coincidences between main.bin and few.bin');
    expect(answer.stderr).toContain('give offset and drift of the second clock by hand');
  });

  it('without a main file are refused', async () => {
    const answer = await verb(['run', at('found.json'), '--second', `tags=${at('second.bin')}`], engine);
    expect(answer.code).toBe(2);
    expect(answer.stderr).toContain('there is no --input tags=FILE');
  });
});
