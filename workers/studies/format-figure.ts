/** Four digits are enough in a sentence. */
export function formatFigure(value: number): string {
  return Number(value.toPrecision(4)).toString();
}
