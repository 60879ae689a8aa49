import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import type { ArrayMap } from '../../shared/contracts/detector';
import type { Preset } from '../../shared/contracts/preset';
import { createRandom } from '../../shared/util/random';
import { writeHdf5 } from '../formats/support/hdf5-writer';

/** Files long enough for several chunks, with the presets that read them. */
const RECORDS = 10_000_000;
const COUNTER_BITS = 16;

/**
 * 4-byte records: 16 bits of time in ns, 8 of channel, bit 31 for "the counter rolled over". Pairs 40 ns apart with a
 * jitter of 3 ns, 300 ns from pair to pair, so that about one record in 400 is a rollover.
 */
export function writeRolloverRecords(dir: string): { file: string; preset: string } {
  const random = createRandom(77);
  const words = new Uint32Array(RECORDS);
  let time = 0;
  let epoch = 0;
  let later = Number.POSITIVE_INFINITY;
  for (let i = 0; i < RECORDS; ) {
    const isLater = later <= time;
    const now = isLater ? later : time;
    const wanted = Math.floor(now / 2 ** COUNTER_BITS);
    if (epoch < wanted) {
      words[i++] = 2 ** 31;
      epoch += 1;
      continue;
    }
    const pixel = Math.floor(4 * random.uniform());
    words[i++] = (now % 2 ** COUNTER_BITS) + ((isLater ? 4 + pixel : pixel) << COUNTER_BITS);
    if (isLater) later = Number.POSITIVE_INFINITY;
    else {
      if (later === Number.POSITIVE_INFINITY) later = time + 40 + Math.round(3 * random.normal());
      time += 1 + Math.floor(300 * random.exponential());
    }
  }
  const file = join(dir, 'rolling.bin');
  writeFileSync(file, new Uint8Array(words.buffer));
  const array = (firstChannel: number): ArrayMap => ({
    width: 2,
    height: 2,
    firstChannel,
    order: 'rows',
    flipX: false,
    flipY: false,
    pitchUm: 50,
    maskedPixels: [],
    delayPs: 0,
    pixelDelayPs: [],
  });
  const preset: Preset = {
    gemel: 1,
    kind: 'preset',
    name: 'A counter that rolls over',
    study: 'delay',
    dials: { 'shift.step': 100_000, 'histogram.range': 1000 },
    inputs: {
      tags: {
        layout: {
          version: 1,
          format: 'records',
          kind: 'tags',
          recordBytes: 4,
          byteOrder: 'little',
          headerBytes: 0,
          time: { firstBit: 0, bits: COUNTER_BITS },
          channel: { firstBit: COUNTER_BITS, bits: 8 },
          rollover: {
            in: 'marker',
            when: [{ field: { firstBit: 31, bits: 1 }, equals: 1 }],
            advanceTick: 2 ** COUNTER_BITS,
            wraps: 'one',
          },
          skip: [],
          tickFs: 1e6,
        },
        detector: { version: 1, kind: 'tags', signal: array(0), idler: array(4) },
        plane: null,
      },
    },
  };
  return { file, preset: writePreset(dir, 'rolling.json', preset) };
}

/** 20,000 frames of 32 x 32 (three chunks): pairs of clicks at most two pixels apart on a dark frame. */
export async function writeFrames(dir: string): Promise<{ file: string; preset: string }> {
  const random = createRandom(78);
  const [frames, side] = [20_000, 32];
  const pixels = new Uint8Array(frames * side * side);
  const step = (): number => Math.round(1.2 * random.normal());
  for (let k = 0; k < frames; k++) {
    for (let pair = 0; pair < 12; pair++) {
      const x = 4 + Math.floor(24 * random.uniform());
      const y = 4 + Math.floor(24 * random.uniform());
      const [x2, y2] = [Math.min(31, Math.max(0, x + step())), Math.min(31, Math.max(0, y + step()))];
      pixels[(k * side + y) * side + x]! += 1;
      pixels[(k * side + y2) * side + x2]! += 1;
    }
  }
  const file = await writeHdf5(join(dir, 'frames.h5'), [
    { name: '/frames', data: pixels, shape: [frames, side, side], dtype: '<B' },
  ]);
  const preset: Preset = {
    gemel: 1,
    kind: 'preset',
    name: 'Frames of pairs',
    study: 'joint-map',
    dials: {},
    inputs: {
      data: {
        layout: { version: 1, format: 'hdf5', kind: 'frames', dataset: '/frames' },
        detector: { version: 1, kind: 'frames', pitchUm: 16, maskedPixels: [] },
        plane: { version: 1, kind: 'near', magnification: { value: 4, sigma: 0.04 } },
      },
    },
  };
  return { file, preset: writePreset(dir, 'frames.json', preset) };
}

function writePreset(dir: string, name: string, preset: Preset): string {
  const path = join(dir, name);
  writeFileSync(path, JSON.stringify(preset));
  return path;
}
