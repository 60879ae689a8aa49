/**
 * Numbers as the page writes them: a value with its 1-sigma uncertainty in brackets, 1.234(5), never with more digits
 * than the uncertainty allows. The uncertainty keeps two digits when its leading digit is 1, else one.
 */

const MINUS = '\u2212';
const THIN_SPACE = '\u2009';

const UNIT_NAMES: Record<string, string> = {
  '1': '',
  um: 'µm',
  us: 'µs',
  urad: 'µrad',
  'um^2': 'µm²',
  hbar: 'ħ',
  'hbar^2': 'ħ²',
  deg: '°',
  sigma: 'σ',
};

/** A unit as stored (ASCII, "hbar^2", "um") the way it is read ("ħ²", "µm"); "1" is no unit. */
export function displayUnit(unit: string): string {
  return (
    UNIT_NAMES[unit] ??
    unit
      .replace(/\^2/g, '²')
      .replace(/\^3/g, '³')
      .replace(/\bum\b/g, 'µm')
  );
}

function withMinus(text: string): string {
  return text.replace('-', MINUS);
}

/** Decimal exponent of the leading digit: 0.0123 -> -2. */
function leadingExponent(value: number): number {
  return Number(Math.abs(value).toExponential().split('e')[1]);
}

/** Place of the last digit kept, as a power of ten: sigma 0.0123 -> -3, 0.0456 -> -2, 230 -> 2. */
export function lastPlace(sigma: number): number {
  const exponent = leadingExponent(sigma);
  const leading = Math.abs(sigma).toExponential()[0];
  return leading === '1' ? exponent - 1 : exponent;
}

function roundToPlace(value: number, place: number): string {
  if (place <= 0) return value.toFixed(Math.min(100, -place));
  const scale = 10 ** place;
  return (Math.round(value / scale) * scale).toFixed(0);
}

/** Six significant digits without trailing zeros: for settings and exact counts. */
export function formatPlain(value: number, digits = 6): string {
  if (Number.isNaN(value)) return 'no value';
  if (!Number.isFinite(value)) return value > 0 ? '∞' : `${MINUS}∞`;
  if (value === 0) return '0';
  const exponent = leadingExponent(value);
  if (exponent < -4 || exponent >= 9) return withMinus(trimZeros(value.toExponential(digits - 1)));
  return withMinus(trimZeros(roundToPlace(value, Math.min(0, exponent - digits + 1))));
}

function trimZeros(text: string): string {
  const [mantissa = '', exponent] = text.split('e');
  const short = mantissa.includes('.') ? mantissa.replace(/\.?0+$/, '') : mantissa;
  return exponent === undefined ? short : `${short}e${exponent.replace('+', '')}`;
}

/** Fixed notation while it stays readable, else a shared power of ten after the bracket: 1.23(4)e−7. */
export function formatWithSigma(value: number, sigma: number | null): string {
  if (sigma === null || sigma === 0 || !Number.isFinite(value)) return formatPlain(value);
  // An uncertainty that could not be had allows no digit to be trusted; two are shown, the bracket says so.
  if (!Number.isFinite(sigma)) return `${formatPlain(value, 2)}(?)`;
  const largest = leadingExponent(Math.max(Math.abs(value), Math.abs(sigma)));
  if (largest < -4 || largest >= 7 || (lastPlace(sigma) > 0 && largest >= 5)) {
    const scale = 10 ** largest;
    return `${fixedWithSigma(value / scale, sigma / scale)}e${withMinus(String(largest))}`;
  }
  return fixedWithSigma(value, sigma);
}

function fixedWithSigma(value: number, sigma: number): string {
  const place = lastPlace(sigma);
  const text = roundToPlace(value, place);
  const unsigned = Number(text) === 0 ? text.replace('-', '') : text;
  const bracket = Math.round(Math.abs(sigma) / 10 ** place) * 10 ** Math.max(0, place);
  return `${withMinus(unsigned)}(${bracket})`;
}

export interface NumberWithUnit {
  value: number;
  sigma: number | null;
  unit: string;
}

/** Rates get an SI prefix: 12.34(5) k/s, the prefix chosen by the value. */
export function formatRate(value: number, sigma: number | null): string {
  const prefixes = ['', 'k', 'M', 'G'];
  const size = Math.abs(value);
  const step = size >= 1000 && Number.isFinite(size) ? Math.min(3, Math.floor(leadingExponent(size) / 3)) : 0;
  const scale = 1000 ** step;
  const text = formatWithSigma(value / scale, sigma === null ? null : sigma / scale);
  return `${text} ${prefixes[step]}/s`;
}

/** Value, uncertainty and unit, as the ledger and the read-outs write them. */
export function formatQuantity({ value, sigma, unit }: NumberWithUnit): string {
  if (unit === '1/s' || unit === '/s') return formatRate(value, sigma);
  const name = displayUnit(unit);
  const text = formatWithSigma(value, sigma);
  return name === '' ? text : `${text} ${name}`;
}

/** An interval to the places its own width allows: [0.0249, 0.0281]. */
export function formatInterval([lo, hi]: readonly [number, number]): string {
  const width = Math.abs(hi - lo);
  if (!Number.isFinite(width) || width === 0) return `[${formatPlain(lo, 3)}, ${formatPlain(hi, 3)}]`;
  const place = lastPlace(width / 4);
  return `[${withMinus(roundToPlace(lo, place))}, ${withMinus(roundToPlace(hi, place))}]`;
}

/** Whole numbers in groups of three: 26 047. */
export function formatCount(count: number): string {
  const digits = Math.abs(Math.round(count)).toFixed(0);
  const grouped = digits.length < 5 ? digits : digits.replace(/\B(?=(\d{3})+$)/g, THIN_SPACE);
  return count < 0 ? `${MINUS}${grouped}` : grouped;
}
