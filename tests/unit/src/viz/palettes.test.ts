import { describe, expect, it } from 'vitest';
import { hexToRgb, labToRgb, rgbToLab } from '../../../../src/viz/lab';
import { getPalette, SCALE_SIZE } from '../../../../src/viz/palettes';

const lightness = (hex: string): number => rgbToLab(hexToRgb(hex))[0];

/** CIE 1976 colour difference between two colours of a scale. */
function difference(a: string, b: string): number {
  const [p, q] = [rgbToLab(hexToRgb(a)), rgbToLab(hexToRgb(b))];
  return Math.hypot(p[0] - q[0], p[1] - q[1], p[2] - q[2]);
}

/** Steps of `stride` colours each, the same everywhere: finer ones are ruled by the rounding to 8 bits. */
function stepsOf(
  colours: readonly string[],
  stride: number,
  measure: (a: string, b: string) => number,
): number[] {
  const count = Math.floor((colours.length - 1) / stride);
  return Array.from({ length: count }, (_, i) => measure(colours[i * stride]!, colours[(i + 1) * stride]!));
}

/** Largest departure of a step of lightness from their mean, in L*. One code of 8 bits is worth up to 0.4. */
function unevenness(colours: readonly string[], stride: number): number {
  const steps = stepsOf(colours, stride, (a, b) => Math.abs(lightness(a) - lightness(b)));
  const mean = steps.reduce((sum, step) => sum + step, 0) / steps.length;
  return Math.max(...steps.map((step) => Math.abs(step - mean)));
}

describe('CIELAB', () => {
  // The primaries of sRGB under D65 as commonly tabulated (from memory).
  it.each([
    ['#ffffff', 100, 0, 0],
    ['#000000', 0, 0, 0],
    ['#ff0000', 53.24, 80.09, 67.2],
    ['#00ff00', 87.73, -86.18, 83.18],
    ['#0000ff', 32.3, 79.19, -107.86],
  ])('%s', (hex, l, a, b) => {
    const lab = rgbToLab(hexToRgb(hex));
    expect(Math.abs(lab[0] - l)).toBeLessThan(0.05);
    expect(Math.abs(lab[1] - a)).toBeLessThan(0.05);
    expect(Math.abs(lab[2] - b)).toBeLessThan(0.05);
  });

  it('goes back to the colour it came from', () => {
    for (const hex of ['#14110e', '#9a3f4a', '#e8a23a', '#43b5aa', '#faf8f3']) {
      const rgb = hexToRgb(hex);
      labToRgb(rgbToLab(rgb)).forEach((channel, i) => {
        expect(channel).toBeCloseTo(rgb[i]!, 4);
      });
    }
  });
});

describe.each(['bench', 'projector'] as const)('scales of %s', (theme) => {
  const background = theme === 'bench' ? '#14110e' : '#faf8f3';
  const { css, pixels } = getPalette(theme, 'counts');
  const signed = getPalette(theme, 'signed').css;

  it('starts counts at the background', () => {
    expect(css).toHaveLength(SCALE_SIZE);
    expect(css[0]).toBe(background);
  });

  it('keeps the lightness of counts monotonic', () => {
    const direction = theme === 'bench' ? 1 : -1;
    for (let i = 1; i < css.length; i++) {
      // Rounding to 8 bits may cost a little of one step, about 0.33 here.
      expect((lightness(css[i]!) - lightness(css[i - 1]!)) * direction).toBeGreaterThan(-0.1);
    }
  });

  it('spreads the lightness of counts evenly', () => {
    // 15 steps of about 5.7.
    expect(unevenness(css, 17)).toBeLessThan(0.4);
  });

  it('has no step of colour much larger than another', () => {
    // Hue and chroma move too; a factor of two between whole steps shows no false edge.
    const steps = stepsOf(css, 17, difference);
    expect(Math.max(...steps) / Math.min(...steps)).toBeLessThan(2);
  });

  it('centres signed scales on the background with arms of equal lightness', () => {
    expect(signed[SCALE_SIZE / 2]).toBe(background);
    expect(signed[SCALE_SIZE / 2 - 1]).toBe(background);
    for (let i = 0; i < SCALE_SIZE / 2; i++) {
      expect(Math.abs(lightness(signed[i]!) - lightness(signed[SCALE_SIZE - 1 - i]!))).toBeLessThan(1);
    }
    expect(unevenness(signed.slice(SCALE_SIZE / 2), 9)).toBeLessThan(0.4);
    expect(unevenness(signed.slice(0, SCALE_SIZE / 2), 9)).toBeLessThan(0.4);
  });

  it('keeps the signs apart without red and green', () => {
    // Yellow-blue axis of CIELAB, the one that red-green blindness leaves.
    const [below, above] = [signed[16]!, signed[SCALE_SIZE - 17]!].map((hex) => rgbToLab(hexToRgb(hex))[2]);
    expect(above! - below!).toBeGreaterThan(30);
  });

  it('writes the same colours as pixels', () => {
    const bytes = new Uint8Array(pixels.buffer, 200 * 4, 4);
    const hex = [...bytes.subarray(0, 3)].map((byte) => byte.toString(16).padStart(2, '0')).join('');
    expect(`#${hex}`).toBe(css[200]);
    expect(bytes[3]).toBe(255);
  });
});
