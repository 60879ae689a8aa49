export interface NumberLimits {
  min?: number;
  max?: number;
  integer?: boolean;
}

export type ParsedNumber = { ok: true; value: number } | { ok: false; message: string };

/** Reads what a person types: a decimal comma, a true minus sign and group spaces are taken too. */
export function parseNumber(text: string, { min, max, integer }: NumberLimits): ParsedNumber {
  const plain = text
    .trim()
    .replace(/[\s\u2009\u202f]/g, '')
    .replace('\u2212', '-')
    .replace(',', '.');
  const value = plain === '' ? Number.NaN : Number(plain);
  if (!Number.isFinite(value)) return { ok: false, message: 'Write a number, for example 1.4.' };
  if (integer && !Number.isInteger(value))
    return { ok: false, message: `Write a whole number, not ${text.trim()}.` };
  if (min !== undefined && value < min) return { ok: false, message: `At least ${min}, not ${text.trim()}.` };
  if (max !== undefined && value > max) return { ok: false, message: `At most ${max}, not ${text.trim()}.` };
  return { ok: true, value };
}

/** One step up or down, kept on the limits and free of binary dust (0.1 + 0.2). */
export function stepNumber(value: number, delta: number, { min, max }: NumberLimits): number {
  const moved = Number((value + delta).toPrecision(12));
  return Math.min(max ?? Number.POSITIVE_INFINITY, Math.max(min ?? Number.NEGATIVE_INFINITY, moved));
}
