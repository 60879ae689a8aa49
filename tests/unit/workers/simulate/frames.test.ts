import { describe, expect, it } from 'vitest';
import type { FrameScenario } from '../../../../shared/contracts/scenario';
import { simulateFrames } from '../../../../workers/simulate/frames';
import { truthOf } from '../../../../workers/simulate/truth';
import { frameScenario } from './scenarios';

function collect(scenario: FrameScenario, blockFrames?: number): number[][] {
  const size = scenario.camera.width * scenario.camera.height;
  const frames: number[][] = [];
  for (const block of simulateFrames(scenario, blockFrames)) {
    expect(block.firstFrame).toBe(frames.length);
    for (let k = 0; k < block.count; k++) frames.push([...block.pixels.slice(k * size, (k + 1) * size)]);
  }
  return frames;
}

const total = (frame: number[]): number => frame.reduce((sum, v) => sum + v, 0);
const mean = (values: number[]): number => values.reduce((sum, v) => sum + v, 0) / values.length;

describe('simulated frames', () => {
  it('hold the electrons of pairs and darks, pair by pair', () => {
    const scenario = frameScenario({ frames: 2000 }, { darksPerPixel: 0.003, fill: 0.81 });
    const frames = collect(scenario);
    expect(frames).toHaveLength(2000);
    const { x, y } = truthOf(scenario);
    const caught = (p: Float64Array): number => p.reduce((sum, v) => sum + v, 0);
    const single = caught(x.pixels.signal) * caught(y.pixels.signal);
    const both = caught(x.pixels.joint) * caught(y.pixels.joint);
    const totals = frames.map(total);
    const expected = 20 * 0.9 * single + 0.003 * 48 * 48;
    // A caught pair adds two at once, so the variance of a frame's total is its mean plus two per pair.
    const variance = expected + 2 * 20 * 0.2 * both;
    expect(Math.abs(mean(totals) - expected)).toBeLessThan(4 * Math.sqrt(variance / 2000));
    const found = mean(totals.map((t) => (t - expected) ** 2));
    expect(Math.abs(found / variance - 1)).toBeLessThan(4 * Math.sqrt(2 / 2000));
  });

  it('correlate opposite places in the far field and equal ones in the near field', () => {
    for (const [optics, sign] of [
      [{ kind: 'far', focalLengthMm: 22 }, -1],
      [{ kind: 'near', magnification: 4 }, 1],
    ] as const) {
      const scenario = frameScenario({ optics, frames: 2000 }, { signalEfficiency: 1, idlerEfficiency: 1 });
      // Sum over a frame of x: a pair moves it by x1 + x2, so its variance tells the sign and size of C.
      const sums = collect(scenario).map((frame) =>
        frame.reduce((sum, v, i) => sum + v * ((i % 48) - 23.5), 0),
      );
      const { pixels } = truthOf(scenario).x;
      const caughtY = truthOf(scenario).y.pixels;
      const bothY = caughtY.joint.reduce((sum, p) => sum + p, 0);
      const oneY = caughtY.signal.reduce((sum, p) => sum + p, 0);
      let square = 0;
      let cross = 0;
      pixels.signal.forEach((p, a) => {
        square += 2 * oneY * p * (a - 23.5) ** 2;
        for (let b = 0; b < 48; b++) {
          cross += 2 * bothY * pixels.joint[b * 48 + a]! * (a - 23.5) * (b - 23.5);
        }
      });
      // Compound Poisson: Var = pairs * E[(sum of x of a pair)^2].
      const expected = 20 * (square + cross);
      expect(Math.sign(cross)).toBe(sign);
      expect(Math.abs(mean(sums.map((s) => s * s)) / expected - 1)).toBeLessThan(4 * Math.sqrt(2 / 2000));
    }
  });

  it('smear charge into a neighbour as often as told', () => {
    const quiet = { signalEfficiency: 0, idlerEfficiency: 0, darksPerPixel: 0.001 };
    const frames = collect(
      frameScenario({ frames: 20_000 }, { ...quiet, width: 20, height: 20, smear: 0.05 }),
    );
    let neighbours = 0;
    for (const frame of frames) {
      frame.forEach((v, i) => {
        if (i % 20 < 19) neighbours += v * frame[i + 1]!;
        if (i < 380) neighbours += v * frame[i + 20]!;
      });
    }
    // Per frame: 0.4 electrons, 5 % smear, 1 in 20 over the edge; and chance neighbours, 760 bonds of two means.
    const perPixel = 0.001 * (1 + 0.05 * 0.95);
    const expected = 20_000 * (0.4 * 0.05 * 0.95 + 760 * perPixel ** 2);
    expect(Math.abs(neighbours - expected)).toBeLessThan(4 * Math.sqrt(expected));
  });

  it('read out clicks, counts and noise', () => {
    const clicks = collect(
      frameScenario({ frames: 20, pairsPerFrame: 2000 }, { readout: { kind: 'clicks' } }),
    );
    expect(new Set(clicks.flat())).toEqual(new Set([0, 1]));
    const dark = { signalEfficiency: 0, idlerEfficiency: 0 };
    const counts = { kind: 'counts', offset: 100, gain: 20, readNoise: 0.25 };
    const noise = collect(frameScenario({ frames: 20 }, { ...dark, readout: counts })).flat();
    const n = noise.length;
    // 0.25 electrons times 20, and the rounding's 1/12.
    const variance = 25 + 1 / 12;
    expect(Math.abs(mean(noise) - 100)).toBeLessThan(4 * Math.sqrt(variance / n));
    expect(Math.abs(mean(noise.map((v) => (v - 100) ** 2)) / variance - 1)).toBeLessThan(
      4 * Math.sqrt(2 / n),
    );
    const full = { kind: 'counts', offset: 200, gain: 50 };
    const clipped = collect(frameScenario({ frames: 5, pairsPerFrame: 20_000 }, { readout: full })).flat();
    expect(Math.max(...clipped)).toBe(255);
  });

  it('drift linearly, the same in any blocks', () => {
    const scenario = frameScenario({ frames: 1000, drift: 1 });
    const frames = collect(scenario);
    expect(collect(scenario, 7).flat().join()).toBe(frames.flat().join());
    const first = mean(frames.slice(0, 500).map(total));
    const second = mean(frames.slice(500).map(total));
    // Halves of a drift g of 1 stand as 3 to 5; each half mean is known to about 1 %.
    expect(Math.abs(first / second - 0.6)).toBeLessThan(0.04);
  });
});
