import { describe, expect, it } from 'vitest';
import type { TagScenario } from '../../../../shared/contracts/scenario';
import { simulateTags } from '../../../../workers/simulate/tags';
import { ratesOf } from '../../../../workers/simulate/truth';
import { arrayAt, tagScenario } from './scenarios';

interface Tags {
  tick: number[];
  channel: number[];
}

function collect(scenario: TagScenario, blockTags?: number): Tags {
  const out: Tags = { tick: [], channel: [] };
  for (const block of simulateTags(scenario, blockTags)) {
    expect(block.firstRecord).toBe(out.tick.length);
    for (let i = 0; i < block.count; i++) {
      out.tick.push(Number(block.baseTick) + block.deltaTick[i]!);
      out.channel.push(block.channel[i]!);
    }
  }
  return out;
}

/** Ticks of the channels [first, last]. */
function armOf({ tick, channel }: Tags, first: number, last: number): number[] {
  return tick.filter((_, i) => channel[i]! >= first && channel[i]! <= last);
}

/** Counts within four Poisson standard deviations. */
function expectPoisson(count: number, mean: number): void {
  expect(Math.abs(count - mean), `${count} counted, ${mean.toFixed(1)} expected`).toBeLessThan(
    4 * Math.sqrt(mean),
  );
}

function pairDelays(a: number[], b: number[], lo: number, hi: number): number[] {
  const out: number[] = [];
  let from = 0;
  for (const t of a) {
    while (from < b.length && b[from]! < t + lo) from += 1;
    for (let k = from; k < b.length && b[k]! <= t + hi; k++) out.push(b[k]! - t);
  }
  return out;
}

describe('simulated tags', () => {
  it('come in time order, whole, inside the run, the same in any blocks', () => {
    const scenario = tagScenario({
      signal: arrayAt(0, { jitterPs: 300, darksPerSecond: 200, delayPs: -5000 }),
      idler: arrayAt(256, { jitterPs: 300, delayPs: 23_700, skewPs: 200 }),
      seconds: 0.02,
    });
    const all = collect(scenario);
    expect(all.tick.length).toBeGreaterThan(5000);
    expect(all.tick.every((t, i) => Number.isInteger(t) && (i === 0 || t >= all.tick[i - 1]!))).toBe(true);
    expect(all.tick[0]).toBeGreaterThanOrEqual(0);
    expect(all.tick.at(-1)).toBeLessThan(2e9);
    expect(collect(scenario, 300)).toEqual(all);
    expect(collect({ ...scenario, seed: 2 })).not.toEqual(all);
  });

  it('have the singles, pairs and accidentals of the scenario', () => {
    const scenario = tagScenario({
      seconds: 0.2,
      signal: arrayAt(0, { darksPerSecond: 300, backgroundPerSecond: 20_000, deadPixels: [120] }),
      idler: arrayAt(256, { efficiency: 0.1, hotPixels: [{ pixel: 3, perSecond: 50_000 }] }),
    });
    const tags = collect(scenario);
    const rates = ratesOf(scenario);
    const [signal, idler] = [armOf(tags, 0, 255), armOf(tags, 256, 511)];
    expectPoisson(signal.length, rates.signal * 0.2);
    expectPoisson(idler.length, rates.idler * 0.2);
    expect(armOf(tags, 120, 120)).toHaveLength(0);
    expect(armOf(tags, 259, 259).length).toBeGreaterThan(9000);
    // No jitter: the pairs are the tags of one tick; accidentals R1 R2 w T with w one tick.
    const accidentals = rates.signal * rates.idler * 1e-11 * 0.2;
    expectPoisson(pairDelays(signal, idler, 0, 0).length, rates.pairs * 0.2 + accidentals);
    expectPoisson(pairDelays(signal, idler, 1000, 1999).length, 1000 * accidentals);
  });

  it('have the delay, jitter and ends of the arms', () => {
    const scenario = tagScenario({
      signal: arrayAt(0, { jitterPs: 150, efficiency: 0.4 }),
      idler: arrayAt(256, { jitterPs: 200, delayPs: 23_700, efficiency: 0.4 }),
    });
    const tags = collect(scenario);
    const delays = pairDelays(armOf(tags, 0, 255), armOf(tags, 256, 511), 2270, 2470);
    const n = delays.length;
    const mean = delays.reduce((sum, d) => sum + d, 0) / n;
    const variance = delays.reduce((sum, d) => sum + (d - mean) ** 2, 0) / (n - 1);
    // 250 ps in 10 ps ticks; two floors add 1/6; accidentals, 1 in 600, are flat over 201 ticks.
    const rates = ratesOf(scenario);
    const flat = (rates.signal * rates.idler * 201e-11 * 0.1) / n;
    const expected = (1 - flat) * (625 + 1 / 6) + (flat * 201 ** 2) / 12;
    expect(Math.abs(mean - 2370)).toBeLessThan(4 * Math.sqrt(expected / n));
    expect(Math.abs(variance / expected - 1)).toBeLessThan(4 * Math.sqrt(2 / n));
  });

  it('keep a pixel silent for its dead time, with the non-paralysable rate', () => {
    const dark = {
      kind: 'array',
      efficiency: 0,
      width: 1,
      height: 1,
      pitchUm: 50,
      darksPerSecond: 1052631.5789473685,
    };
    const scenario = tagScenario({
      pairsPerSecond: 0,
      signal: { ...dark, firstChannel: 0, deadTimeNs: 50 },
      idler: { ...dark, firstChannel: 1, darksPerSecond: 0 },
    });
    const { tick } = collect(scenario);
    expect(Math.min(...tick.slice(1).map((t, i) => t - tick[i]!))).toBeGreaterThanOrEqual(5000);
    // Check value A16 (Knoll, Radiation Detection and Measurement, from memory): 1052631.58 true -> 1e6 measured at
    // 50 ns. Counting with dead time is narrower than Poisson: variance N (1 - m td)^2.
    expect(Math.abs(tick.length - 1e5)).toBeLessThan(4 * Math.sqrt(1e5));
  });

  it('fire neighbours by crosstalk and again by afterpulsing, as often as told', () => {
    const scenario = tagScenario({
      pairsPerSecond: 0,
      seconds: 1,
      signal: arrayAt(0, { backgroundPerSecond: 1e5, crosstalk: 0.02, deadTimeNs: 20 }),
      idler: {
        ...arrayAt(256, { width: 1, height: 1, backgroundPerSecond: 50_000 }),
        afterpulse: { probability: 0.02, meanNs: 100 },
      },
    });
    const { tick, channel } = collect(scenario);
    const signal = tick.map((t, i) => [t, channel[i]!] as const).filter(([, c]) => c < 256);
    const idler = tick.filter((_, i) => channel[i]! >= 256);
    let same = 0;
    for (let i = 1; i < signal.length; i++) {
      const [a, b] = [signal[i - 1]![1], signal[i]![1]];
      const apart = Math.abs((a % 16) - (b % 16)) + Math.abs(Math.floor(a / 16) - Math.floor(b / 16));
      if (signal[i]![0] === signal[i - 1]![0] && apart === 1) same += 1;
    }
    // Of the four directions 1/16 point over the edge of a 16-wide array; a chain adds its square.
    const told = 0.02 * (1 - 1 / 16);
    expectPoisson(same, 1e5 * told * (1 + told));
    // Check value A19 (geometric series): 0.02 -> 1.0204081632653061 observed per primary.
    expectPoisson(idler.length, 50_000 * 1.0204081632653061);
  });

  it('drift linearly', () => {
    const scenario = tagScenario({ drift: 0.8, signal: arrayAt(0, { efficiency: 0.5 }) });
    const signal = armOf(collect(scenario), 0, 255);
    const rate = ratesOf(scenario).signal * 0.1;
    // Halves of a linear drift g: (1 -+ g/4)/2 of the counts.
    expectPoisson(signal.filter((t) => t < 5e9).length, (rate / 2) * 0.8);
    expectPoisson(signal.filter((t) => t >= 5e9).length, (rate / 2) * 1.2);
  });

  it('show the stencil only in coincidence', () => {
    const scenario = tagScenario({
      pairsPerSecond: 2e6,
      signal: {
        kind: 'bucket',
        efficiency: 0.5,
        channel: 512,
        stencil: { cellUm: 100, rows: ['#.##', '#...', '####', '.###'] },
      },
      idler: arrayAt(256, { width: 8, height: 8, pitchUm: 100, efficiency: 0.5 }),
    });
    const { tick, channel } = collect(scenario);
    const image = new Float64Array(64);
    for (let i = 1; i < tick.length; i++) {
      for (const [bucket, pixel] of [
        [i, i - 1],
        [i - 1, i],
      ] as const) {
        if (tick[i] === tick[i - 1] && channel[bucket] === 512 && channel[pixel]! < 512) {
          image[channel[pixel]! - 256]! += 1;
        }
      }
    }
    let chi2 = 0;
    let cells = 0;
    ratesOf(scenario).idlerImage.forEach((rate, i) => {
      if (rate * 0.1 < 10) return;
      chi2 += (image[i]! - rate * 0.1) ** 2 / (rate * 0.1);
      cells += 1;
    });
    expect(cells).toBeGreaterThan(20);
    expect(Math.abs(chi2 - cells)).toBeLessThan(4 * Math.sqrt(2 * cells));
  });

  it('keep whole ticks over a day at 1 ps', () => {
    const scenario = tagScenario({ seconds: 86_400, tickFs: 1000, pairsPerSecond: 2 });
    let last = 0n;
    let count = 0;
    let backwards = 0;
    for (const block of simulateTags(scenario, 1000)) {
      for (let i = 0; i < block.count; i++) {
        const tick = block.baseTick + BigInt(block.deltaTick[i]!);
        if (tick < last) backwards += 1;
        last = tick;
      }
      count += block.count;
    }
    expect(backwards).toBe(0);
    const rates = ratesOf(scenario);
    expectPoisson(count, (rates.signal + rates.idler) * 86_400);
    expect(last < 86_400_000_000_000_000n && last > 86_300_000_000_000_000n).toBe(true);
  });

  it('are none when nothing fires', () => {
    expect(collect(tagScenario({ pairsPerSecond: 0 })).tick).toHaveLength(0);
  });
});
