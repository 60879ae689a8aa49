import { hexToRgb, isInGamut, type Lab, labToRgb, type Rgb, rgbToLab } from './lab';
import { interpolateMonotone } from './monotone';
import type { Theme } from './types';

/**
 * Colour scales. The stops give the hues; the lightness between the first and the last is spread evenly (CIELAB L*), so
 * equal steps of the data are equal steps of lightness and no false edge is drawn. Every scale starts at the background:
 * what is not there has no ink. Signed scales leave it on both sides at the same lightness.
 */

export const SCALE_SIZE = 256;

const BACKGROUND: Record<Theme, string> = { bench: '#14110e', projector: '#faf8f3' };

const COUNT_STOPS: Record<Theme, readonly string[]> = {
  bench: ['#2b1c2b', '#5b2a49', '#9a3f4a', '#cf6a3d', '#e9a545', '#f7e3a5'],
  projector: ['#efdebb', '#dfb077', '#c4713f', '#96383f', '#571c40', '#1d1420'],
};

/** Blue against orange: kept apart by every common colour blindness. */
const SIGNED_STOPS: Record<Theme, { below: readonly string[]; above: readonly string[] }> = {
  bench: { below: ['#1d2a33', '#4c7f9c', '#a9cfe0'], above: ['#3a2418', '#b5622f', '#f3c392'] },
  projector: { below: ['#a9c4d6', '#3f7597', '#0f3550'], above: ['#e6b184', '#b25a22', '#5a2208'] },
};

/** Nearest colour of the same lightness and hue that a screen can show. */
function intoGamut([lightness, a, b]: Lab): Rgb {
  let chroma = 1;
  let rgb = labToRgb([lightness, a, b]);
  while (!isInGamut(rgb) && chroma > 0.02) {
    chroma -= 0.02;
    rgb = labToRgb([lightness, a * chroma, b * chroma]);
  }
  return rgb;
}

/** `size` colours with even lightness from the first stop to the last, hues taken from the stops at their lightness. */
function evenScale(stops: readonly string[], size: number, lastLightness?: number): Rgb[] {
  const labs = stops.map((hex) => rgbToLab(hexToRgb(hex)));
  // Knots measured as a rising distance from the first lightness, whichever way the scale runs.
  const start = labs[0]![0];
  const at = labs.map((lab) => Math.abs(lab[0] - start));
  const end = lastLightness ?? labs[labs.length - 1]![0];
  const a = labs.map((lab) => lab[1]);
  const b = labs.map((lab) => lab[2]);
  return Array.from({ length: size }, (_, i) => {
    const lightness = start + ((end - start) * i) / (size - 1);
    const x = Math.abs(lightness - start);
    return intoGamut([lightness, interpolateMonotone(at, a, x), interpolateMonotone(at, b, x)]);
  });
}

function buildSigned(theme: Theme): Rgb[] {
  const { below, above } = SIGNED_STOPS[theme];
  const half = SCALE_SIZE / 2;
  const lightnessOf = (stops: readonly string[]): number => rgbToLab(hexToRgb(stops[stops.length - 1]!))[0];
  // Both arms stop at the lightness the weaker one reaches, or one sign would look stronger.
  const ends = [lightnessOf(below), lightnessOf(above)];
  const end = theme === 'bench' ? Math.min(...ends) : Math.max(...ends);
  const arm = (stops: readonly string[]): Rgb[] => evenScale([BACKGROUND[theme], ...stops], half, end);
  return [...arm(below).reverse(), ...arm(above)];
}

function toHex(rgb: Rgb): string {
  const byte = (channel: number): string =>
    Math.round(Math.min(1, Math.max(0, channel)) * 255)
      .toString(16)
      .padStart(2, '0');
  return `#${byte(rgb[0])}${byte(rgb[1])}${byte(rgb[2])}`;
}

export interface Palette {
  /** SCALE_SIZE colours from the low end of the data to the high end. */
  css: readonly string[];
  /** The same as 32-bit pixels for an ImageData buffer (little-endian ABGR, opaque). */
  pixels: Uint32Array;
}

function toPalette(colours: readonly Rgb[]): Palette {
  const css = colours.map(toHex);
  const pixels = new Uint32Array(css.length);
  css.forEach((hex, i) => {
    const value = Number.parseInt(hex.slice(1), 16);
    pixels[i] = (255 << 24) | ((value & 255) << 16) | (value & 0xff00) | (value >> 16);
  });
  return { css, pixels };
}

const PALETTES: Record<Theme, { counts: Palette; signed: Palette }> = {
  bench: {
    counts: toPalette(evenScale([BACKGROUND.bench, ...COUNT_STOPS.bench], SCALE_SIZE)),
    signed: toPalette(buildSigned('bench')),
  },
  projector: {
    counts: toPalette(evenScale([BACKGROUND.projector, ...COUNT_STOPS.projector], SCALE_SIZE)),
    signed: toPalette(buildSigned('projector')),
  },
};

export function getPalette(theme: Theme, scale: 'counts' | 'signed'): Palette {
  return PALETTES[theme][scale];
}
