/** Tables of the compiled power-of-two transform (wasm/frames-fft.ts). */

/** Shortest the compiled transform takes. */
const LEAST = 16;

/** Power of two that holds all lags of n samples: 256 -> 512, 200 -> 512, 3 -> 16. */
export function compiledLength(n: number): number {
  let length = LEAST;
  while (length < 2 * n - 1) length *= 2;
  return length;
}

/** Where value k of a transform of n values comes to lie: radix 4 as long as 4 divides what is left, then radix 2. */
export function digitReversed(k: number, n: number): number {
  if (n <= 2) return k;
  const quarter = n / 4;
  return (k % 4) * quarter + digitReversed(Math.floor(k / 4), quarter);
}

/** exp(-2 pi i j m / length) for m = 1, 2, 3 as {cos, sin}, stage by stage, lengths n, n/4, ... above 8. */
export function twiddles(n: number): number[] {
  const table: number[] = [];
  for (let length = n; length > 8; length /= 4) {
    for (let j = 0; j < length / 4; j++) {
      for (const m of [1, 2, 3]) {
        const angle = (-2 * Math.PI * j * m) / length;
        table.push(Math.cos(angle), Math.sin(angle));
      }
    }
  }
  return table;
}
