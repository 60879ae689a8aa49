import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../../shared/util/random';
import { FrameAccumulator } from '../../../../workers/accumulators/frame-accumulator';
import { fillDials } from '../../../../workers/studies/dials';
import { jointMapStudy } from '../../../../workers/studies/joint-map/study';
import { countedFrames, nearPlane } from '../../../physics/study-inputs';

const width = 60;
const height = 60;

/** Frames of Poisson light in which pixel (12, 5) and (20, 9) always hold what the other does. */
function finished(region: { x0: number; y0: number; x1: number; y1: number } | null, frames = 40) {
  const dials = fillDials(jointMapStudy.info, { resamples: 100, 'joint.region': region });
  const random = createRandom(2);
  const pixels = Float64Array.from({ length: frames * width * height }, () => random.poisson(2));
  for (let l = 0; l < frames; l += 1) {
    const at = l * width * height;
    pixels[at + 5 * width + 12]! += 3;
    pixels[at + 9 * width + 20] = pixels[at + 5 * width + 12]!;
  }
  const stub = new FrameAccumulator({
    kind: 'frames',
    width,
    height,
    frames,
    blocks: 10,
    masked: new Uint8Array(width * height),
  });
  const input = countedFrames(stub.tally(), nearPlane);
  const facts = { kind: 'frames' as const, frames, width, height, type: 'uint8', reader: 'test' };
  const spec = jointMapStudy.spec({ ...input, facts }, dials, {});
  if (spec.kind !== 'frames') throw new Error('frames were expected');
  const accumulator = new FrameAccumulator(spec);
  accumulator.push({ kind: 'frames', firstFrame: 0, count: frames, width, height, pixels, bytes: 0 });
  const tally = accumulator.tally();
  const output = jointMapStudy.finish({
    inputs: { data: { ...input, facts, tally } },
    dials,
    seed: 1,
    partial: false,
  });
  return { maps: output.maps, tally };
}

describe('Maps of the joint distribution of a region', () => {
  it('show the partner of the brightest pixel, of all, and every pair', () => {
    const { maps, tally } = finished({ x0: 10, y0: 4, x1: 25, y1: 11 });
    const image = maps['conditional.image']!;
    expect(image.shape).toEqual([8, 16]);
    expect(image.label).toContain('(12, 5)');
    const [own, partner] = [1 * 16 + 2, 5 * 16 + 10];
    expect(image.data.indexOf(Math.max(...image.data))).toBe(partner);
    expect([image.masked![own], image.data[own]]).toEqual([1, 0]);
    // Its axes are those of the frame.
    expect(image.axes[0]!.start).toBeCloseTo(
      maps['mean.frame']!.axes[0]!.start + 10 * image.axes[0]!.step,
      9,
    );
    const all = maps['joint.full']!;
    expect(all.shape).toEqual([128, 128]);
    expect([all.data[own * 128 + partner], all.data[partner * 128 + own]]).toEqual([
      image.data[partner],
      image.data[partner],
    ]);
    expect(image.data[partner]).toBeCloseTo(tally.diagonal[5 * width + 12]! / 39, 9);
    const column = (j: number) =>
      Array.from({ length: 128 }, (_, i) => all.data[j * 128 + i]!).reduce((sum, v) => sum + v, 0);
    expect(maps['partners.image']!.data[7]).toBeCloseTo(column(7), 9);
  });

  it('have errors as wide as the values of uncorrelated pixels scatter', () => {
    const { maps } = finished({ x0: 20, y0: 20, x1: 59, y1: 59 }, 200);
    for (const id of ['conditional.image', 'partners.image']) {
      const { data, sigma, masked } = maps[id]!;
      let squares = 0;
      let count = 0;
      data.forEach((v, c) => {
        if (masked![c] === 1) return;
        squares += (v / sigma![c]!) ** 2;
        count += 1;
      });
      // 1600 pixels tell it to 3.5 percent; the end frames, one in 200, add to it.
      expect(squares / count, id).toBeGreaterThan(0.9);
      expect(squares / count, id).toBeLessThan(1.15);
    }
  });

  it('leave the pairs out where a result could not hold them, and all where there is no region', () => {
    const { maps } = finished({ x0: 0, y0: 0, x1: 45, y1: 44 }, 20);
    expect(maps['joint.full']).toBeUndefined();
    expect(maps['conditional.image']!.shape).toEqual([45, 46]);
    expect(Object.keys(finished(null, 20).maps).sort()).toEqual([
      'joint.x',
      'joint.y',
      'mean.frame',
      'minus',
      'plus',
    ]);
  });

  it('are refused with a sentence for a region too large or beside the camera', () => {
    expect(() => finished({ x0: 0, y0: 0, x1: 69, y1: 9 })).toThrow(/frames end at x 59, y 59/);
    const dials = { ...fillDials(jointMapStudy.info, {}), 'joint.region': { x0: 0, y0: 0, x1: 64, y1: 63 } };
    const facts = {
      kind: 'frames' as const,
      frames: 9,
      width: 128,
      height: 128,
      type: 'uint8',
      reader: 'test',
    };
    const accumulator = new FrameAccumulator({
      kind: 'frames',
      width: 8,
      height: 8,
      frames: 9,
      blocks: 1,
      masked: new Uint8Array(64),
    });
    const input = { ...countedFrames(accumulator.tally(), nearPlane), facts };
    expect(() => jointMapStudy.spec(input, dials, {})).toThrow(/4096 pixels .* 65 x 64/);
  });
});
