/** sRGB (IEC 61966-2-1) to CIELAB (CIE 15:2004, D65, 2 degree observer) and back: enough to build colour scales in. */

export type Lab = readonly [lightness: number, a: number, b: number];
export type Rgb = readonly [red: number, green: number, blue: number];

const WHITE: Rgb = [0.95047, 1, 1.08883];
const EPSILON = 216 / 24389;
const KAPPA = 24389 / 27;

export function hexToRgb(hex: string): Rgb {
  const value = Number.parseInt(hex.slice(1), 16);
  return [(value >> 16) / 255, ((value >> 8) & 255) / 255, (value & 255) / 255];
}

function toLinear(channel: number): number {
  return channel <= 0.04045 ? channel / 12.92 : ((channel + 0.055) / 1.055) ** 2.4;
}

function fromLinear(channel: number): number {
  return channel <= 0.0031308 ? channel * 12.92 : 1.055 * channel ** (1 / 2.4) - 0.055;
}

function pivot(t: number): number {
  return t > EPSILON ? Math.cbrt(t) : (KAPPA * t + 16) / 116;
}

function unpivot(f: number): number {
  return f ** 3 > EPSILON ? f ** 3 : (116 * f - 16) / KAPPA;
}

export function rgbToLab(rgb: Rgb): Lab {
  const [r, g, b] = [toLinear(rgb[0]), toLinear(rgb[1]), toLinear(rgb[2])];
  const x = pivot((0.4124564 * r + 0.3575761 * g + 0.1804375 * b) / WHITE[0]);
  const y = pivot((0.2126729 * r + 0.7151522 * g + 0.072175 * b) / WHITE[1]);
  const z = pivot((0.0193339 * r + 0.119192 * g + 0.9503041 * b) / WHITE[2]);
  return [116 * y - 16, 500 * (x - y), 200 * (y - z)];
}

/** Channels may leave 0..1: the colour is then outside sRGB. */
export function labToRgb([lightness, a, b]: Lab): Rgb {
  const fy = (lightness + 16) / 116;
  const x = WHITE[0] * unpivot(fy + a / 500);
  const y = WHITE[1] * unpivot(fy);
  const z = WHITE[2] * unpivot(fy - b / 200);
  return [
    fromLinear(3.2404542 * x - 1.5371385 * y - 0.4985314 * z),
    fromLinear(-0.969266 * x + 1.8760108 * y + 0.041556 * z),
    fromLinear(0.0556434 * x - 0.2040259 * y + 1.0572252 * z),
  ];
}

export function isInGamut(rgb: Rgb): boolean {
  return rgb.every((channel) => channel >= -1e-4 && channel <= 1 + 1e-4);
}
