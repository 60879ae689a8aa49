import { spawnSync } from 'node:child_process';
import { copyFileSync, mkdtempSync, readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { presetSchema } from '../../shared/contracts/preset';
import { type ResultFile, resultFileSchema } from '../../shared/contracts/result';
import { type NodeEngine, startNodeEngine } from '../../workers/entries/node-engine';
import { findPythonWithH5py } from '../support/tools';
import { gemel, verb } from './gemel';

let dir = '';
let engine: NodeEngine;
const crashes: Error[] = [];
beforeAll(() => {
  dir = mkdtempSync(join(tmpdir(), 'gemel-cli-'));
  engine = startNodeEngine(2, (error) => crashes.push(error));
});
afterAll(async () => {
  await engine.close();
  rmSync(dir, { recursive: true, force: true });
  expect(crashes).toEqual([]);
});

const delay = ['run', 'samples/presets/delay-near.json'];
const witness = [
  'run',
  'samples/presets/witness-tags.json',
  '--input',
  'near=samples/near-tags.h5',
  '--input',
  'far=samples/far-tags.h5',
];

function parseResult(stdout: string): ResultFile {
  return resultFileSchema.parse(JSON.parse(stdout));
}

/** What must not depend on when and where it ran. */
function essence(result: ResultFile): unknown {
  const { startedAt: _startedAt, seconds: _seconds, ...provenance } = result.provenance;
  return { ...result, provenance };
}

describe('studies and templates', () => {
  it('lists every study with its inputs and dials, JSON only on stdout', async () => {
    const answer = await gemel(['studies']);
    expect(answer.code).toBe(0);
    const { studies } = JSON.parse(answer.stdout);
    expect(studies.map((study: { id: string }) => study.id)).toEqual([
      'delay',
      'joint-map',
      'witness',
      'ghost-image',
    ]);
    for (const study of studies) {
      expect(study.inputs.length).toBeGreaterThan(0);
      for (const dial of study.dials) expect(dial.reason, `${study.id}.${dial.id}`).toMatch(/\w/);
    }
  });

  it('prints a preset to edit that is a preset', async () => {
    const answer = await verb(['template', 'witness'], engine);
    expect(answer.code).toBe(0);
    const preset = presetSchema.parse(JSON.parse(answer.stdout));
    expect(Object.keys(preset.inputs)).toEqual(['near', 'far']);
    expect(preset.inputs.far?.plane?.kind).toBe('far');
  });
});

describe('inspect', () => {
  it('proposes a layout and shows the first records', async () => {
    const answer = await verb(['inspect', 'samples/near-tags.h5'], engine);
    expect(answer.code).toBe(0);
    const inspection = JSON.parse(answer.stdout);
    expect(inspection.layout).toMatchObject({ format: 'hdf5', kind: 'tags' });
    expect(inspection.facts.first.length).toBeGreaterThan(3);
  });
});

describe('run', () => {
  it('gives the same bits on one worker and on two, and writes the result file', async () => {
    const one = await gemel([...witness, '--workers', '1', '--seed', '7']);
    const out = join(dir, 'witness.json');
    const two = await gemel([...witness, '--workers', '2', '--seed', '7', '--out', out]);
    expect([one.code, two.code]).toEqual([0, 0]);
    const result = parseResult(one.stdout);
    expect(essence(parseResult(readFileSync(out, 'utf8')))).toEqual(essence(result));
    expect(JSON.parse(two.stdout)).toMatchObject({ gemel: 1, study: 'witness', out });
    expect(result.provenance.inputs.map((input) => input.name)).toEqual(['near', 'far']);
    const sum = spawnSync('sha256sum', ['samples/near-tags.h5'], { encoding: 'utf8' }).stdout.split(' ')[0];
    expect(result.provenance.inputs[0]?.sha256).toBe(sum);
    expect(result.verdicts['reid.x.net']).toMatchObject({ bound: 0.25, side: 'below', level: 'violated' });
  });

  it('writes maps that NumPy reads', async () => {
    const maps = join(dir, 'maps');
    const args = [
      'samples/presets/joint-map-near.json',
      '--input',
      'data=samples/near-tags.h5',
      '--maps',
      maps,
    ];
    const answer = await verb(['run', ...args], engine);
    expect(answer.code).toBe(0);
    const result = parseResult(answer.stdout);
    const [id, map] = Object.entries(result.maps).find(([, each]) => each.shape.length === 2)!;
    expect(map.data).toBeUndefined();
    const python = findPythonWithH5py();
    expect(python, 'install python3-h5py').not.toBeNull();
    const code = 'import numpy, sys; a = numpy.load(sys.argv[1]); print(list(a.shape), a.dtype.str)';
    const seen = spawnSync(python!, ['-c', code, join(maps, map.file!)], { encoding: 'utf8' });
    expect(seen.stdout.trim(), id).toBe(`[${map.shape.join(', ')}] <f8`);
  });

  it('takes dials from the command line', async () => {
    const answer = await verb(
      [...delay, '--input', 'tags=samples/near-tags.h5', '--set', 'window=2000'],
      engine,
    );
    const result = parseResult(answer.stdout);
    expect(result.quantities['window.width']?.value).toBe(2000);
    expect(result.provenance.dials.window).toBe(2000);
  });

  it('reads the same run from records and from HDF5: counts identical', async () => {
    const records = ['samples/presets/delay-near-records.json', '--input', 'tags=samples/near-tags.bin'];
    const [a, b] = [
      parseResult((await verb([...delay, '--input', 'tags=samples/near-tags.h5'], engine)).stdout),
      parseResult((await verb(['run', ...records], engine)).stdout),
    ];
    expect(b.quantities).toEqual(a.quantities);
    expect(b.maps).toEqual(a.maps);
  });

  it('can be interrupted', async () => {
    const answer = await gemel(witness, (text, interrupt) => {
      if (text.includes('finding the delay')) interrupt();
    });
    expect(answer.code).toBe(130);
    expect(answer.stdout).toBe('');
  });
});

describe('simulate', () => {
  it('writes an acquisition that the studies read', async () => {
    const scenario = readFileSync('samples/scenarios/near-tags.json', 'utf8');
    const path = join(dir, 'scenario.json');
    writeFileSync(path, scenario);
    const out = join(dir, 'simulated.h5');
    const answer = await verb(['simulate', path, '--out', out], engine);
    expect([answer.code, answer.stderr]).toEqual([0, expect.any(String)]);
    const study = await verb([...delay, '--input', `tags=${out}`], engine);
    expect(study.code).toBe(0);
  });
});

describe('bad input: exit 2, one sentence with the place, nothing on stdout', () => {
  const near = readFileSync('samples/near-tags.h5');
  const cases: [string, () => string[], RegExp][] = [
    ['no such verb', () => ['analyse'], /no verb "analyse"/],
    ['no such study', () => ['template', 'delays'], /no study "delays".*delay/],
    ['no such option', () => [...delay, '--windoww', '3'], /--windoww/],
    ['no such file', () => [...delay, '--input', 'tags=nowhere.h5'], /nowhere\.h5.*no such file/],
    ['an unknown input', () => [...delay, '--input', 'near=samples/near-tags.h5'], /near/],
    ['no input', () => delay, /tags/],
    [
      'a dial that is not there',
      () => [...delay, '--input', 'tags=samples/near-tags.h5', '--set', 'windw=3'],
      /no dial "windw".*window/,
    ],
    [
      'a dial beyond its limits',
      () => [...delay, '--input', 'tags=samples/near-tags.h5', '--set', 'window=-3'],
      /window/,
    ],
    [
      'an empty file',
      () => {
        const path = join(dir, 'empty.h5');
        writeFileSync(path, '');
        return [...delay, '--input', `tags=${path}`];
      },
      /empty\.h5/,
    ],
    [
      'a text file named .h5',
      () => {
        const path = join(dir, 'notes.h5');
        writeFileSync(path, 'time,channel\n12,3\n15,4\n');
        return [...delay, '--input', `tags=${path}`];
      },
      /notes\.h5.*text|text.*notes\.h5/s,
    ],
    [
      'a truncated HDF5 file',
      () => {
        const path = join(dir, 'cut.h5');
        writeFileSync(path, near);
        truncateSync(path, Math.floor(near.length / 2));
        return [...delay, '--input', `tags=${path}`];
      },
      /cut\.h5/,
    ],
    [
      'records of the wrong length',
      () => {
        const path = join(dir, 'odd.bin');
        copyFileSync('samples/near-tags.bin', path);
        truncateSync(path, readFileSync(path).length - 1);
        return ['run', 'samples/presets/delay-near-records.json', '--input', `tags=${path}`];
      },
      /odd\.bin.*byte|byte.*odd\.bin/s,
    ],
    [
      'a preset that is not one',
      () => {
        const path = join(dir, 'preset.json');
        writeFileSync(path, '{"gemel": 1, "kind": "preset"}');
        return ['run', path];
      },
      /preset\.json.*name/,
    ],
  ];
  it.each(cases)('%s', async (_what, args, sentence) => {
    const answer = await verb(args(), engine);
    expect(answer.stderr).toMatch(sentence);
    expect([answer.code, answer.stdout]).toEqual([2, '']);
    expect(answer.stderr).not.toMatch(/\n\s+at /);
  });

  it('the process leaves with the same code and sentence', async () => {
    const answer = await gemel([...delay, '--input', 'tags=nowhere.h5']);
    expect(answer).toMatchObject({ code: 2, stdout: '', stderr: expect.stringMatching(/no such file.*\n$/) });
  });
});
