import { type ListScans, rangeWithin, type TickList } from './tag-lists';
import type { TagWasm } from './tag-wasm';

/** Tags of x a time: they and their partners fit the second-level cache. */
const PIECE = 2 ** 14;
/** Room of the kernels' list of survivors: 2048 32-bit and 2048 16-bit numbers. */
const LIST_BYTES = 2048 * 6;

/** The scans of `ListScans` compiled. The lists go through the module's memory piece by piece; nothing stays there. */
export function compileListScans(wasm: TagWasm): ListScans {
  const { call } = wasm;
  return {
    histogram: (x, y, loTick, binTick, out) => {
      const hiTick = loTick + out.length * binTick - 1;
      counted(wasm, [out], ([outAt]) =>
        inPieces(wasm, x, null, y, null, loTick, hiTick, (piece) => {
          const { xAt, countX, yAt, countY, listAt } = piece;
          call.histogramLists(xAt, countX, yAt, countY, 0, loTick, binTick, out.length, outAt!, listAt);
        }),
      );
    },
    matrix: (x, siteX, y, siteY, { loTick, hiTick }, sitesX, out) =>
      counted(wasm, [out], ([outAt]) =>
        inPieces(wasm, x, siteX, y, siteY, loTick, hiTick, (piece) => {
          const { xAt, siteXAt, countX, yAt, siteYAt, countY, listAt } = piece;
          call.matrixLists(
            xAt,
            siteXAt,
            countX,
            yAt,
            siteYAt,
            countY,
            0,
            loTick,
            hiTick,
            sitesX,
            outAt!,
            listAt,
          );
        }),
      ),
    images: (x, siteX, herald, windows, outs) => {
      // Seen from x the heralds lie at minus the delay.
      const lows = windows.map(({ hiTick }) => -hiTick);
      const highs = windows.map(({ loTick }) => -loTick);
      counted(wasm, outs, (outsAt) =>
        inPieces(wasm, x, siteX, herald, null, Math.min(...lows), Math.max(...highs), (piece) => {
          const { xAt, siteXAt, countX, yAt, countY, listAt } = piece;
          for (let w = 0; w < windows.length; w++) {
            call.imageLists(xAt, siteXAt, countX, yAt, countY, 0, lows[w]!, highs[w]!, outsAt[w]!, listAt);
          }
        }),
      );
    },
    triples: (herald, one, windowOne, two, windowTwo, out) =>
      lent(wasm, () => {
        const outAt = wasm.place(32);
        wasm.f64(outAt, 4).fill(0);
        const heraldAt = wasm.place(8 * PIECE);
        const first = growing(wasm);
        const second = growing(wasm);
        let low1 = 0;
        let low2 = 0;
        for (let start = 0; start < herald.length; start += PIECE) {
          const stop = Math.min(start + PIECE, herald.length);
          const from = herald[start]!;
          const to = herald[stop - 1]!;
          const [start1, stop1] = rangeWithin(one, low1, from + windowOne.loTick, to + windowOne.hiTick);
          const [start2, stop2] = rangeWithin(two, low2, from + windowTwo.loTick, to + windowTwo.hiTick);
          const oneAt = first(one, start1, stop1);
          const twoAt = second(two, start2, stop2);
          wasm.f64(heraldAt, stop - start).set(herald.subarray(start, stop));
          call.countTriples(
            heraldAt,
            stop - start,
            oneAt,
            twoAt,
            windowOne.loTick,
            windowOne.hiTick,
            windowTwo.loTick,
            windowTwo.hiTick,
            outAt,
          );
          low1 = start1;
          low2 = start2;
        }
        const counts = wasm.f64(outAt, 4);
        for (let i = 0; i < 4; i++) out[i]! += counts[i]!;
      }),
  };
}

/** Whatever is placed meanwhile is given back. */
export function lent(wasm: TagWasm, use: () => void): void {
  const { mark } = wasm;
  try {
    use();
  } finally {
    wasm.release(mark);
  }
}

/** 32-bit counters in the module for each of the caller's arrays, added to them in the end. */
export function counted(
  wasm: TagWasm,
  outs: readonly Float64Array[],
  use: (at: readonly number[]) => void,
): void {
  lent(wasm, () => {
    const at = outs.map((out) => wasm.place(4 * (out.length + 1)));
    outs.forEach((out, k) => {
      wasm.u32(at[k]!, out.length + 1).fill(0);
    });
    use(at);
    outs.forEach((out, k) => {
      const counts = wasm.u32(at[k]!, out.length);
      for (let i = 0; i < out.length; i++) out[i]! += counts[i]!;
    });
  });
}

interface Piece {
  xAt: number;
  siteXAt: number;
  countX: number;
  yAt: number;
  siteYAt: number;
  countY: number;
  listAt: number;
}

function inPieces(
  wasm: TagWasm,
  x: TickList,
  siteX: Uint16Array | null,
  y: TickList,
  siteY: Uint16Array | null,
  loTick: number,
  hiTick: number,
  scan: (piece: Piece) => void,
): void {
  const listAt = wasm.place(LIST_BYTES);
  const xAt = wasm.place(8 * PIECE);
  const siteXAt = wasm.place(2 * PIECE);
  const placeY = growing(wasm);
  const placeSites = growing(wasm);
  let low = 0;
  for (let start = 0; start < x.length; start += PIECE) {
    const stop = Math.min(start + PIECE, x.length);
    const [from, to] = rangeWithin(y, low, x[start]! + loTick, x[stop - 1]! + hiTick);
    low = from;
    if (from === to) continue;
    const yAt = placeY(y, from, to);
    const siteYAt = siteY === null ? 0 : placeSites(siteY, from, to);
    wasm.f64(xAt, stop - start).set(x.subarray(start, stop));
    if (siteX !== null) wasm.u16(siteXAt, stop - start).set(siteX.subarray(start, stop));
    scan({ xAt, siteXAt, countX: stop - start, yAt, siteYAt, countY: to - from, listAt });
  }
}

/** Copies parts of lists to one place, found anew when a part is longer than any before; four times Infinity follow. */
function growing(wasm: TagWasm): (list: TickList | Uint16Array, start: number, stop: number) => number {
  let at = 0;
  let room = 0;
  return (list, start, stop) => {
    const count = stop - start;
    if (room < count) {
      room = Math.max(PIECE, 2 * count);
      at = wasm.place(8 * (room + 4));
    }
    if (list instanceof Uint16Array) {
      wasm.u16(at, count).set(list.subarray(start, stop));
    } else {
      const placed = wasm.f64(at, count + 4);
      placed.set(list.subarray(start, stop));
      placed.fill(Number.POSITIVE_INFINITY, count);
    }
    return at;
  };
}
