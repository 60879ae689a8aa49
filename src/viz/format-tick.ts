const MINUS = '\u2212';
const THIN_SPACE = '\u2009';

/** Decimals that tell ticks `step` apart: 0.25 -> 2, 5 -> 0. */
function decimalsFor(step: number): number {
  if (!(step > 0) || !Number.isFinite(step)) return 0;
  let decimals = Math.max(0, -Math.floor(Math.log10(step) + 1e-9));
  // 0.25 needs one place more than its leading digit says.
  while (decimals < 12 && Math.abs(step * 10 ** decimals - Math.round(step * 10 ** decimals)) > 1e-6)
    decimals++;
  return decimals;
}

function group(text: string): string {
  const [whole = '', fraction] = text.split('.');
  const grouped = whole.replace('-', '').length < 5 ? whole : whole.replace(/\B(?=(\d{3})+$)/g, THIN_SPACE);
  return (fraction === undefined ? grouped : `${grouped}.${fraction}`).replace('-', MINUS);
}

function positionDigits(value: number, step: number): string {
  const places = decimalsFor(Number((Math.abs(step) || 1).toPrecision(3)));
  return value.toFixed(Math.min(12, places));
}

/** The number `formatPosition` writes, for what is read by machines. */
export function roundPosition(value: number, step: number): number {
  // Plus zero: there is no negative zero to read.
  return Number(positionDigits(value, step)) + 0;
}

/** A position to the places of its bin's first three digits, so that the read-out promises no more than the binning. */
export function formatPosition(value: number, step: number): string {
  const text = positionDigits(value, step);
  return group(Number(text) === 0 ? text.replace('-', '') : text);
}

/** Tick labels of one axis, all with the same number of places; powers of ten beyond what is readable. */
export function tickFormatter(ticks: readonly number[]): (value: number) => string {
  const step = ticks.length > 1 ? Math.abs(ticks[1]! - ticks[0]!) : Math.abs(ticks[0] ?? 1);
  const largest = Math.max(0, ...ticks.map(Math.abs));
  if (largest >= 1e7 || (largest > 0 && largest < 1e-3)) {
    return (value) => (value === 0 ? '0' : shortPower(value));
  }
  const decimals = decimalsFor(step);
  return (value) => group(value.toFixed(decimals));
}

function shortPower(value: number): string {
  const [mantissa = '', exponent = ''] = value.toExponential(2).split('e');
  const trimmed = mantissa.includes('.') ? mantissa.replace(/\.?0+$/, '') : mantissa;
  return `${trimmed}e${exponent.replace('+', '')}`.replaceAll('-', MINUS);
}

/** For amounts: 12k, 3.5M. `step` keeps neighbours apart. */
export function formatAmount(value: number, step: number): string {
  const size = Math.abs(value);
  if (size >= 1e6) return `${group((value / 1e6).toFixed(decimalsFor(step / 1e6)))}M`;
  if (size >= 1e4) return `${group((value / 1e3).toFixed(decimalsFor(step / 1e3)))}k`;
  if (size !== 0 && (size < 1e-3 || step < 1e-4)) return shortPower(value);
  return group(value.toFixed(decimalsFor(step)));
}

/** Decades that fall inside a span, for logarithmic axes. */
export function decades(lo: number, hi: number): number[] {
  const first = Math.ceil(Math.log10(lo) - 1e-9);
  const last = Math.floor(Math.log10(hi) + 1e-9);
  return Array.from({ length: Math.max(0, last - first + 1) }, (_, i) => 10 ** (first + i));
}

/** Decade labels: plain between 0.001 and 1000, powers beyond. */
export function formatDecade(value: number): string {
  const exponent = Math.round(Math.log10(value));
  if (exponent >= -4 && exponent <= 4) return value.toFixed(Math.max(0, -exponent));
  return `1e${exponent}`.replace('-', MINUS);
}
