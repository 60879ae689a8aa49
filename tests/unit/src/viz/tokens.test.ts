import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

const css = readFileSync(new URL('../../../../src/app/styles.css', import.meta.url), 'utf8');

function tokensIn(block: string): Map<string, string> {
  return new Map([...block.matchAll(/--color-([a-z]+):\s*(#[0-9a-f]{6});/g)].map((m) => [m[1]!, m[2]!]));
}

/** Contrast ratio of WCAG 2.2, section 1.4.3: (L1 + 0.05) / (L2 + 0.05) with relative luminances. */
function contrast(a: string, b: string): number {
  const luminance = (hex: string): number => {
    const value = Number.parseInt(hex.slice(1), 16);
    const linear = [value >> 16, (value >> 8) & 255, value & 255].map((byte) => {
      const c = byte / 255;
      return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4;
    });
    return 0.2126 * linear[0]! + 0.7152 * linear[1]! + 0.0722 * linear[2]!;
  };
  const [l, d] = [luminance(a), luminance(b)].sort((x, y) => y - x);
  return (l! + 0.05) / (d! + 0.05);
}

const split = css.indexOf('html[data-theme="projector"]');
const themes = { bench: tokensIn(css.slice(0, split)), projector: tokensIn(css.slice(split)) };

describe.each(['bench', 'projector'] as const)('tokens of %s', (theme) => {
  const token = (name: string): string => themes[theme].get(name) ?? '';
  const inks = ['text', 'dim', 'faint', 'signal', 'idler', 'pair', 'accidental', 'warn', 'fail'];

  it.each(inks)('%s is readable on the background', (ink) => {
    expect(contrast(token(ink), token('bg'))).toBeGreaterThanOrEqual(4.5);
  });

  it.each(['text', 'dim', 'fail'])('%s is readable on raised and shaded ground', (ink) => {
    expect(contrast(token(ink), token('raised'))).toBeGreaterThanOrEqual(4.5);
    expect(contrast(token(ink), token('shade'))).toBeGreaterThanOrEqual(4.5);
  });

  it('draws controls and focus so that they are found', () => {
    expect(contrast(token('control'), token('bg'))).toBeGreaterThanOrEqual(3);
    expect(contrast(token('focus'), token('bg'))).toBeGreaterThanOrEqual(3);
  });
});

it('names the same tokens in both themes', () => {
  expect([...themes.projector.keys()].sort()).toEqual([...themes.bench.keys()].sort());
});
