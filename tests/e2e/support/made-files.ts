import { writeFileSync } from 'node:fs';

/** Files of invented data, small and the same every time. */

/** Time in picoseconds and channel: signal pixels 0 to 15, idler pixels 16 to 31. */
export type Tag = readonly [timePs: number, channel: number];

/** Numbers in [0, 1): a linear congruential generator (Numerical Recipes' constants, from memory). */
function randomOf(seed: number): () => number {
  let state = seed;
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
}

/** Pairs over ten seconds, anti-correlated in position, 2 ns apart with a jitter of a few hundred picoseconds. */
export function pairTags(pairs: number): Tag[] {
  const random = randomOf(7);
  const tags: Tag[] = [];
  for (let i = 0; i < pairs; i++) {
    const timePs = Math.floor(random() * 1e13);
    const pixel = Math.floor(random() * 16);
    const jitterPs = Math.round((random() + random() + random() - 1.5) * 300);
    tags.push([timePs, pixel], [timePs + 2000 + jitterPs, 31 - pixel]);
    if (i % 4 === 0) tags.push([Math.floor(random() * 1e13), Math.floor(random() * 32)]);
  }
  return tags.sort((a, b) => a[0] - b[0]);
}

/** NPY 1.0 as NumPy's format page lays it out: magic, version, length of the header, the header padded to 64 bytes. */
function npyHeader(descr: string, shape: string): Buffer {
  const text = `{'descr': ${descr}, 'fortran_order': False, 'shape': ${shape}, }`;
  const length = Math.ceil((10 + text.length + 1) / 64) * 64 - 10;
  const head = Buffer.alloc(10 + length, ' ');
  head.write('\x93NUMPY\x01\x00', 0, 'latin1');
  head.writeUInt16LE(length, 8);
  head.write(text, 10, 'latin1');
  head[9 + length] = 10;
  return head;
}

/** A structured array of time and channel, ten bytes a tag. */
export function writeTagsNpy(path: string, tags: readonly Tag[]): void {
  const body = Buffer.alloc(10 * tags.length);
  tags.forEach(([timePs, channel], i) => {
    body.writeBigUInt64LE(BigInt(timePs), 10 * i);
    body.writeUInt16LE(channel, 10 * i + 8);
  });
  const head = npyHeader("[('time', '<u8'), ('channel', '<u2')]", `(${tags.length},)`);
  writeFileSync(path, Buffer.concat([head, body]));
}

/** Times in nanoseconds with three decimals. */
export function writeTagsCsv(path: string, tags: readonly Tag[]): void {
  const lines = tags.map(([timePs, channel]) => `${(timePs / 1000).toFixed(3)},${channel}`);
  writeFileSync(path, `time_ns,channel\n${lines.join('\n')}\n`);
}

/** Frames of few photons at random. */
export function writeFramesNpy(path: string, { frames, side }: { frames: number; side: number }): void {
  const random = randomOf(3);
  const body = Buffer.alloc(frames * side * side);
  for (let i = 0; i < body.length; i++) body[i] = random() < 0.3 ? 1 : 0;
  writeFileSync(path, Buffer.concat([npyHeader("'|u1'", `(${frames}, ${side}, ${side})`), body]));
}
