import { spawnSync } from 'node:child_process';
import { copyFileSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type ResultFile, resultFileSchema } from '../../shared/contracts/result';
import { decodeMap } from '../../shared/contracts/result-codec';
import { type NodeEngine, startNodeEngine } from '../../workers/entries/node-engine';
import { loadPart, writePart } from '../../workers/entries/part-io';
import type { PartFile } from '../../workers/pipeline/part-file';
import { findParallel } from '../support/tools';
import { verb } from './gemel';
import { writeFrames, writeRolloverRecords } from './long-files';

let dir = '';
let engine: NodeEngine;
const crashes: Error[] = [];
beforeAll(() => {
  dir = mkdtempSync(join(tmpdir(), 'gemel-shards-'));
  engine = startNodeEngine(2, (error) => crashes.push(error));
});
afterAll(async () => {
  await engine.close();
  rmSync(dir, { recursive: true, force: true });
  expect(crashes).toEqual([]);
});

const samples = [
  'samples/presets/witness-tags.json',
  ...['--input', 'near=samples/near-tags.h5', '--input', 'far=samples/far-tags.h5'],
];

/** 3: done, and a check failed; invented data need not be good. */
async function ask(args: readonly string[], codes = [0]): Promise<string> {
  const answer = await verb(args, engine);
  expect(codes, answer.stderr).toContain(answer.code);
  return answer.stdout;
}

/** Counts every shard into a file of its own. */
async function countShards(name: string, run: readonly string[], of: number): Promise<string[]> {
  const parts = Array.from({ length: of }, (_, i) => join(dir, `${name}-${i + 1}.gemel`));
  for (const [i, part] of parts.entries()) {
    await ask(['run', ...run, '--shard', `${i + 1}/${of}`, '--out', part]);
  }
  return parts;
}

/** The undivided run, and the same put together from shards given in another order. */
async function bothWays(
  name: string,
  run: readonly string[],
  of: number,
): Promise<{ whole: ResultFile; combined: ResultFile }> {
  const whole = resultFileSchema.parse(JSON.parse(await ask(['run', ...run], [0, 3])));
  const parts = await countShards(name, run, of);
  const combined = resultFileSchema.parse(JSON.parse(await ask(['combine', ...parts.reverse()], [0, 3])));
  return { whole, combined };
}

function essence(result: ResultFile): unknown {
  const { startedAt: _startedAt, seconds: _seconds, ...provenance } = result.provenance;
  return { ...result, provenance };
}

describe('three shards give the result of one run', () => {
  it('on tags, to the last bit, where most shards have nothing to do', async () => {
    const { whole, combined } = await bothWays('tags', [...samples, '--seed', '7'], 3);
    expect(essence(combined)).toEqual(essence(whole));
  });

  it('on records whose counter rolls over, to the last bit', async () => {
    const { file, preset } = writeRolloverRecords(dir);
    const { whole, combined } = await bothWays('rolling', [preset, '--input', `tags=${file}`], 3);
    expect(essence(combined)).toEqual(essence(whole));
    // The counter lasts 65.5 us, the run a hundred thousand times as long.
    expect(whole.quantities['coincidences.raw']?.n).toBeGreaterThan(1e6);
  });

  it('on frames, with the same counts and sums to 12 digits', async () => {
    const { file, preset } = await writeFrames(dir);
    const { whole, combined } = await bothWays('frames', [preset, '--input', `data=${file}`], 3);
    expect(Object.keys(combined.maps)).toEqual(Object.keys(whole.maps));
    for (const [id, text] of Object.entries(whole.maps)) {
      const [a, b] = [decodeMap(text).data, decodeMap(combined.maps[id]!).data];
      const most = a.reduce((max, value) => Math.max(max, Math.abs(value)), 0);
      const worst = a.reduce((max, value, i) => Math.max(max, Math.abs(value - b[i]!)), 0);
      expect(worst / most, id).toBeLessThan(1e-12);
    }
    for (const [id, { value, sigma, n }] of Object.entries(whole.quantities)) {
      const twin = combined.quantities[id]!;
      expect(twin.n, id).toBe(n);
      expect(Math.abs(twin.value / value - 1), id).toBeLessThan(1e-12);
      // Bootstrap blocks of frames are kept in single precision.
      if (sigma !== null) expect(Math.abs(twin.sigma! - sigma), id).toBeLessThanOrEqual(1e-5 * sigma);
    }
    expect(combined.checks.map((check) => check.status)).toEqual(whole.checks.map((check) => check.status));
    expect(combined.provenance.inputs).toEqual(whole.provenance.inputs);
  });
});

/** Indented blocks of a section of the README: what a person copies. */
function blocksOf(section: string): string[] {
  const text = readFileSync('README.md', 'utf8').split(`## ${section}\n`)[1]!.split('\n## ')[0]!;
  return text
    .split(/\n(?! {4}|\n)/)
    .flatMap((paragraph) => /(?:^|\n)((?: {4}.*\n?)+)/.exec(paragraph)?.[1] ?? [])
    .map((block) => block.replace(/^ {4}/gm, ''));
}

describe('the lines of the README', () => {
  const inFolder = (block: string, folder: string): string =>
    block
      .replaceAll('part-', `${folder}/part-`)
      .replaceAll('result.json', `${folder}/result.json`)
      .replaceAll('--maps maps', `--maps ${folder}/maps`);
  // Sources that are newer than the bundle start slowly, and three start at once.
  const timeout = 240_000;
  const shell = (script: string, more: Record<string, string> = {}) => {
    const env = { PATH: process.env.PATH, HOME: dir, ...more };
    const done = spawnSync('sh', ['-e', '-c', script], { encoding: 'utf8', env });
    expect(done.status, done.stderr).toBe(0);
  };

  it('spread a run with GNU parallel', { timeout }, async () => {
    expect(findParallel(), 'install parallel').not.toBeNull();
    const [parallel] = blocksOf('Many machines');
    shell(inFolder(parallel!, dir));
    const combined = resultFileSchema.parse(JSON.parse(readFileSync(join(dir, 'result.json'), 'utf8')));
    const whole = resultFileSchema.parse(
      JSON.parse(await ask(['run', ...samples, '--maps', join(dir, 'maps')])),
    );
    expect(essence(combined)).toEqual(essence(whole));
  });

  it('spread a run as a job array', { timeout }, async () => {
    const [, script] = blocksOf('Many machines');
    const folder = mkdtempSync(join(dir, 'array-'));
    const path = join(folder, 'shard.sh');
    writeFileSync(path, inFolder(script!, folder));
    for (const index of ['1', '2', '3']) shell(`sh ${path}`, { SLURM_ARRAY_TASK_ID: index });
    const parts = ['1', '2', '3'].map((index) => join(folder, `part-${index}.gemel`));
    const combined = resultFileSchema.parse(JSON.parse(await ask(['combine', ...parts])));
    expect(combined.verdicts['reid.x.net']).toMatchObject({ level: 'violated' });
  });
});

describe('parts that do not belong together: exit 2, one sentence with the place', () => {
  let parts: string[] = [];
  beforeAll(async () => {
    parts = await countShards(
      'near',
      ['samples/presets/delay-near.json', '--input', 'tags=samples/near-tags.h5'],
      3,
    );
  });

  const refused = async (args: readonly string[], sentence: RegExp): Promise<void> => {
    const answer = await verb(args, engine);
    expect(answer.stderr).toMatch(sentence);
    expect([answer.code, answer.stdout]).toEqual([2, '']);
    expect(answer.stderr).not.toMatch(/\n\s+at /);
  };
  /** A part as somebody else might have written it. */
  const altered = async (from: string, alter: (file: PartFile) => void): Promise<string> => {
    const file = await loadPart(from);
    alter(file);
    const path = join(dir, 'altered.gemel');
    await writePart(path, file);
    return path;
  };

  it('a shard is missing', async () => {
    await refused(['combine', parts[0]!, parts[2]!], /Shard 2 of 3 is missing.*--shard 2\/3.*\[shard 2\/3\]/);
    await refused(['combine', parts[2]!], /Shards 1, 2 of 3 are missing/);
  });

  it('a shard is there twice', async () => {
    const copy = join(dir, 'copy.gemel');
    copyFileSync(parts[1]!, copy);
    await refused(['combine', ...parts, copy], /Shard 2 of 3 is given twice.*near-2.*copy\.gemel/);
  });

  it('a shard of another cut, preset, file or engine', async () => {
    const [first, second, third] = parts as [string, string, string];
    const run = ['run', 'samples/presets/delay-near.json'];
    const other = join(dir, 'other.gemel');
    const input = ['--input', 'tags=samples/near-tags.h5'];
    await ask([...run, ...input, '--shard', '2/4', '--out', other]);
    await refused(['combine', first, other, third], /other\.gemel.*one of 4 shards.*one of 3/);
    await ask([...run, ...input, '--set', 'window=3000', '--shard', '2/3', '--out', other]);
    await refused(['combine', first, other, third], /other\.gemel.*its dials.*differ/);
    await ask([...run, '--input', 'tags=samples/far-tags.h5', '--shard', '2/3', '--out', other]);
    await refused(['combine', first, other, third], /other\.gemel.*its files of the input "tags".*differ/);
    const newer = await altered(second, (file) => {
      file.head.engine = '9.0.0';
    });
    await refused(['combine', first, newer, third], /altered\.gemel.*engine.*0\.1\.0 and 9\.0\.0/);
  });

  it('a part that is cut, changed, newer or no part at all', async () => {
    const [first, second, third] = parts as [string, string, string];
    const path = join(dir, 'broken.gemel');
    const bytes = readFileSync(third);
    const write = (content: Uint8Array): string => {
      writeFileSync(path, content);
      return path;
    };
    await refused(
      ['combine', first, second, write(bytes.subarray(0, 5000))],
      /ends after 5000 bytes.*byte 5000/,
    );
    const changed = Uint8Array.from(bytes);
    changed[changed.length - 20]! ^= 1;
    await refused(['combine', first, second, write(changed)], /not as it was written/);
    const newer = Uint8Array.from(bytes);
    newer[8] = 2;
    await refused(['combine', first, second, write(newer)], /part of version 2.*byte 8/);
    await refused(['combine', first, second, 'samples/near-tags.h5'], /near-tags\.h5 is not a part/);
    await refused(['combine', first, second, join(dir, 'nowhere.gemel')], /no file at/);
    await refused(['combine'], /Expected parts, found none/);
  });

  it('counts that are not whole', async () => {
    const [first, second, third] = parts as [string, string, string];
    const alterations: [(part: TagLike) => void, RegExp][] = [
      [(part) => (part.part = 2), /version 2 was found/],
      [(part) => (part.tally.a.singles = new Float64Array(3)), /tally\.a\.singles/],
      [(part) => part.tally.histogram.counts.fill(Number.NaN), /tally\.histogram\.counts.*finite/],
      [(part) => part.tail.site.fill(70_000), /tail\.site/],
      [(part) => (part.tally.sliceTick = 3), /tally\.sliceTick/],
      [(part) => (part.tally.lastTick = 2n ** 90n), /not whole at tally/],
    ];
    for (const [alter, sentence] of alterations) {
      const path = await altered(third, (file) => alter(file.parts.tags as TagLike));
      await refused(['combine', first, second, path], sentence);
    }
  });

  it('a shard that cannot be', async () => {
    const run = ['run', ...samples];
    const out = ['--out', join(dir, 'never.gemel')];
    for (const shard of ['0/3', '4/3', '1', '1/0', 'a/b', '-1/3']) {
      await refused([...run, `--shard=${shard}`, ...out], /--shard takes i\/n/);
    }
    await refused([...run, '--shard', '1/3'], /--shard needs --out/);
    await refused([...run, '--shard', '1/3', ...out, '--maps', dir], /--maps to "combine"/);
  });
});

interface TagLike {
  part: number;
  tally: {
    lastTick: bigint;
    sliceTick: number;
    a: { singles: Float64Array };
    histogram: { counts: Float64Array };
  };
  tail: { site: Int32Array };
}
