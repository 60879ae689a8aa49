/** Four digits are enough in a sentence, but none left of the decimal point is rounded away. */
export function formatFigure(value: number): string {
  return Math.abs(value) >= 1000 ? Math.round(value).toString() : Number(value.toPrecision(4)).toString();
}

/** A value and its 1-sigma error to two digits of the error: "0.0357 ± 0.0011". */
export function formatMeasured(value: number, sigma: number): string {
  if (!(sigma > 0)) return formatFigure(value);
  const places = Math.min(12, Math.max(0, 1 - Math.floor(Math.log10(sigma))));
  return `${value.toFixed(places)} ± ${sigma.toFixed(places)}`;
}
