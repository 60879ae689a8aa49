import { describe, expect, it } from 'vitest';
import { Problem, type ProblemCode } from '../../../../shared/errors/problem';
import { parseScenario } from '../../../../workers/simulate/scenario';
import { arrayAt, plainFrames, plainTags, source } from './scenarios';

function problemOf(value: unknown): Problem {
  try {
    parseScenario(value);
  } catch (thrown) {
    if (thrown instanceof Problem) return thrown;
    throw thrown;
  }
  throw new Error('no problem was found');
}

const wrong: [string, unknown, ProblemCode, string, RegExp][] = [
  ['a newer version', { ...plainTags, version: 2 }, 'newer-version', 'version', /version 2/],
  ['no object', 'tags', 'bad-input', 'scenario', /object/],
  ['an unknown kind', { ...plainTags, kind: 'sound' }, 'bad-input', 'kind', /kind/],
  ['an unknown field', { ...plainTags, colour: 'red' }, 'bad-input', 'scenario', /colour/],
  ['no time', { ...plainTags, seconds: 0 }, 'bad-input', 'seconds', /0/],
  [
    'wavelengths that share no energy',
    { ...plainTags, source: { ...source, idlerNm: 900 } },
    'bad-input',
    'source.idlerNm',
    /1\/pumpNm/,
  ],
  [
    'arms on the same channels',
    { ...plainTags, idler: arrayAt(200) },
    'bad-input',
    'idler',
    /200-455.*0-255/,
  ],
  ['too many channels', { ...plainTags, idler: arrayAt(65_400) }, 'bad-input', 'idler', /65535/],
  [
    'a pixel outside',
    { ...plainTags, signal: arrayAt(0, { deadPixels: [256] }) },
    'bad-input',
    'signal',
    /256/,
  ],
  [
    'a stencil of other characters',
    {
      ...plainTags,
      signal: { kind: 'bucket', efficiency: 1, channel: 9, stencil: { cellUm: 1, rows: ['#x'] } },
    },
    'bad-input',
    'signal.stencil.rows.0',
    /# and \./,
  ],
  [
    'a ragged stencil',
    {
      ...plainTags,
      signal: { kind: 'bucket', efficiency: 1, channel: 9, stencil: { cellUm: 1, rows: ['#', '##'] } },
    },
    'bad-input',
    'signal.stencil.rows',
    /equally long/,
  ],
  [
    'counts past the type',
    { ...plainFrames, camera: { ...plainFrames.camera, readout: { kind: 'counts', offset: 250, gain: 10 } } },
    'bad-input',
    'camera.readout',
    /uint8/,
  ],
];

describe('a scenario', () => {
  it('gets its defaults', () => {
    const scenario = parseScenario(plainTags);
    expect(scenario).toMatchObject({ drift: 0, file: { time: '/tags/time', recordBytes: 8 } });
    expect(parseScenario(JSON.parse(JSON.stringify(scenario)))).toEqual(scenario);
  });

  it.each(wrong)('with %s is refused with its place', (_, value, code, place, sentence) => {
    const problem = problemOf(value);
    expect([problem.code, problem.place]).toEqual([code, place]);
    expect(problem.message).toMatch(sentence);
  });
});
