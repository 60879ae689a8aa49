import { describe, expect, it } from 'vitest';
import { presetSchema } from '../../../../../shared/contracts/preset';
import { resultFileSchema } from '../../../../../shared/contracts/result';
import { decodeMap } from '../../../../../shared/contracts/result-codec';
import { arrangeResults, nextSorting } from '../../../../../src/features/results/model/sort-results';
import { toOutput, toWholeFile } from '../../../../../src/features/results/model/stored-output';
import { toPreset } from '../../../../../src/lib/result-preset';
import { fileNameOf } from '../../../../../src/lib/save-file';
import { inlineMap, resultFile, summary } from '../../app/fixtures';

describe('the list of results', () => {
  const rows = [
    summary({ id: 'a', name: 'run 10', createdAt: '2026-03-01T00:00:00Z' }),
    summary({ id: 'b', name: 'run 9', createdAt: '2026-03-03T00:00:00Z', study: 'witness' }),
    summary({ id: 'c', name: 'Stencil', createdAt: '2026-03-02T00:00:00Z', by: 'Other Person' }),
  ];
  const ids = (...args: Parameters<typeof arrangeResults>) => arrangeResults(...args).map(({ id }) => id);
  const all = { words: '', study: null };

  it('sorts by time, and numbers in names as numbers', () => {
    expect(ids(rows, all, { key: 'when', descending: true })).toEqual(['b', 'c', 'a']);
    expect(ids(rows, all, { key: 'name', descending: false })).toEqual(['b', 'a', 'c']);
  });

  it('keeps equal rows newest first in either direction', () => {
    expect(ids(rows, all, { key: 'by', descending: false })).toEqual(['b', 'a', 'c']);
    expect(ids(rows, all, { key: 'by', descending: true })).toEqual(['c', 'b', 'a']);
  });

  it('finds all words in name, maker or study', () => {
    const byTime = { key: 'when', descending: true } as const;
    expect(ids(rows, { words: 'RUN witness', study: null }, byTime)).toEqual(['b']);
    expect(ids(rows, { words: 'other', study: null }, byTime)).toEqual(['c']);
    expect(ids(rows, { words: '', study: 'delay' }, byTime)).toEqual(['c', 'a']);
  });

  it('turns round on a second click', () => {
    expect(nextSorting({ key: 'name', descending: false }, 'when')).toEqual({
      key: 'when',
      descending: true,
    });
    expect(nextSorting({ key: 'when', descending: true }, 'when')).toEqual({
      key: 'when',
      descending: false,
    });
  });
});

describe('a stored result', () => {
  it('is a whole result file again with its maps', () => {
    const whole = toWholeFile(resultFile, { 'delay.histogram': inlineMap });
    expect(resultFileSchema.parse(whole)).toEqual(whole);
    expect(
      toOutput(whole, { 'delay.histogram': decodeMap(inlineMap) }).maps['delay.histogram']?.data[1],
    ).toBe(40);
  });

  it('gives the preset that repeats it', () => {
    const again = toPreset(resultFile, 'Night run');
    expect(presetSchema.parse(again)).toEqual(again);
    expect(again?.inputs.tags?.plane?.kind).toBe('near');
    expect(again?.dials).toEqual(resultFile.provenance.dials);
    expect(toPreset({ ...resultFile, study: 'of-a-later-version' }, 'Night run')).toBeNull();
  });
});

describe('names of files', () => {
  it.each([
    ['Night run 14 / near', 'night-run-14-near.json'],
    ['../../etc', 'etc.json'],
    ['ψ', 'gemel.json'],
  ])('%s', (name, expected) => expect(fileNameOf(name, '.json')).toBe(expected));
});
