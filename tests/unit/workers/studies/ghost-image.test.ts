import { describe, expect, it } from 'vitest';
import type { TagDetector } from '../../../../shared/contracts/detector';
import type { DialValues } from '../../../../shared/contracts/dial';
import type { StudyOutput } from '../../../../shared/contracts/output';
import { fillDials } from '../../../../workers/studies/dials';
import { ghostImageStudy } from '../../../../workers/studies/ghost-image/study';
import { type PairStream, pairStream } from '../../../support/pair-stream';
import { arrayMap, runTagStudy, tagInput } from '../../../support/run-study';

const detector: TagDetector = {
  version: 1,
  kind: 'tags',
  bucket: { channel: 99, delayPs: 0 },
  idler: arrayMap(8, 8, 100),
};
const inSquare = (pixel: number): boolean => {
  const [x, y] = [pixel % 8, Math.floor(pixel / 8)];
  return x >= 2 && x <= 5 && y >= 2 && y <= 5;
};
const stream = (open: (pixel: number) => boolean): PairStream => ({
  seconds: 0.1,
  tickFs: 1000,
  pairRate: 1e6,
  jitterPs: [300, 300],
  delayPs: 7000,
  darks: [5000, 50000],
  land: (r) => {
    const pixel = r.below(64);
    return [open(pixel) && r.uniform() < 0.3 ? 99 : -1, r.uniform() < 0.2 ? 100 + pixel : -1];
  },
  darkChannel: (arm, r) => (arm === 0 ? 99 : 100 + r.below(64)),
});
const regions: DialValues = {
  'region.open': { x0: 2, y0: 2, x1: 5, y1: 5 },
  'region.closed': { x0: 0, y0: 7, x1: 7, y1: 7 },
};
const checkOf = (output: StudyOutput, id: string) => output.checks.find((check) => check.id === id);

describe('Ghost image', () => {
  const run = runTagStudy(ghostImageStudy, pairStream(stream(inSquare), 3), detector, regions);

  it('answers with the quantities and maps it promises', () => {
    const { quantities, maps } = run.output;
    for (const id of ['visibility.raw', 'visibility.net', 'cnr.raw', 'cnr.net', 'car', 'heralding.idler']) {
      expect(quantities[id], id).toBeDefined();
    }
    expect(Object.keys(maps)).toEqual([
      'image.net',
      'image.raw',
      'image.singles',
      'delay.histogram',
      'rates.bucket',
      'rates.idler',
    ]);
    expect(maps['image.net']?.scale).toBe('signed');
  });

  it('adds up: raw image, prompt pairs and net pairs are the same counts', () => {
    const { maps, quantities } = run.output;
    const total = (id: string): number => maps[id]!.data.reduce((a, b) => a + b, 0);
    expect(total('image.raw')).toBe(quantities['coincidences.raw']!.n);
    expect(total('image.net') / quantities['coincidences.net']!.value).toBeCloseTo(
      quantities['coincidences.raw']!.n / quantities['coincidences.raw']!.value,
      9,
    );
    const { data, sigma } = maps['image.raw']!;
    expect(sigma).toEqual(data.map(Math.sqrt));
  });

  it('gives visibility and CNR of the drawn regions by hand', () => {
    const { data } = run.output.maps['image.raw']!;
    const mean = (keep: (pixel: number) => boolean): number => {
      const pixels = [...data.keys()].filter(keep);
      return pixels.reduce((sum, pixel) => sum + data[pixel]!, 0) / pixels.length;
    };
    const open = mean(inSquare);
    const closed = mean((pixel) => pixel >= 56);
    const { quantities } = run.output;
    expect(quantities['visibility.raw']?.value).toBeCloseTo((open - closed) / (open + closed), 12);
    expect(quantities['cnr.raw']?.value).toBeCloseTo((open - closed) / Math.sqrt(open + closed), 10);
  });

  it('mirrors the image with the detector map', () => {
    const corner = (pixel: number): boolean => pixel % 8 < 3 && pixel < 24;
    const block = pairStream(stream(corner), 8);
    const plain = runTagStudy(ghostImageStudy, block, detector).output.maps['image.raw']!.data;
    const flipped = { ...detector, idler: { ...detector.idler!, flipX: true } };
    const mirrored = runTagStudy(ghostImageStudy, block, flipped).output.maps['image.raw']!.data;
    const byHand = plain.map((_, pixel) => plain[Math.floor(pixel / 8) * 8 + 7 - (pixel % 8)]!);
    expect(mirrored).toEqual(byHand);
    expect(checkOf(runTagStudy(ghostImageStudy, block, detector).output, 'image-inside')?.status).toBe(
      'caution',
    );
  });

  it('passes its checks on a sound run, split by itself or drawn', () => {
    for (const output of [run.output, run.finish({})]) {
      expect(output.checks.filter((check) => check.status === 'fail')).toEqual([]);
      expect(checkOf(output, 'image-inside')?.status).toBe('pass');
    }
    expect(run.finish({}).quantities['visibility.net']?.method).toContain('chosen on half');
  });

  it('does not flatter an image of nothing', () => {
    // Every pixel equally open: picking the bright ones and measuring the same counts would show contrast.
    const z = Array.from({ length: 12 }, (_, n) => {
      const flat = runTagStudy(
        ghostImageStudy,
        pairStream({ ...stream(() => true), seconds: 0.02 }, n + 1),
        detector,
      );
      expect(checkOf(flat.output, 'image-shows')?.status).not.toBe('pass');
      return checkOf(flat.output, 'image-shows')?.figure ?? 0;
    });
    const mean = z.reduce((a, b) => a + b) / z.length;
    expect(Math.abs(mean)).toBeLessThan(3 / Math.sqrt(z.length));
  });

  it('says when regions overlap', () => {
    const output = run.finish({ ...regions, 'region.closed': { x0: 4, y0: 5, x1: 7, y1: 7 } });
    expect(checkOf(output, 'regions-apart')).toMatchObject({ status: 'fail', figure: 2 });
  });

  it('refuses regions outside the array and maps without a bucket', () => {
    const input = tagInput(detector, 10, 1000);
    const validate = (map: TagDetector, dials: DialValues) =>
      ghostImageStudy.validate({ tags: { ...input, detector: map } }, fillDials(ghostImageStudy.info, dials));
    expect(() => validate(detector, regions)).not.toThrow();
    expect(() => validate(detector, { 'region.open': { x0: 2, y0: 2, x1: 8, y1: 5 } })).toThrow(
      /ends at \(7, 7\)/,
    );
    expect(() => validate(detector, { 'region.open': { x0: 5, y0: 2, x1: 3, y1: 5 } })).toThrow(/rectangle/);
    expect(() => validate({ version: 1, kind: 'tags', idler: detector.idler }, {})).toThrow(/bucket/);
  });

  it('survives an empty file', () => {
    const none = { ...pairStream(stream(inSquare), 1), count: 0, records: 0 };
    const { output } = runTagStudy(
      ghostImageStudy,
      { ...none, deltaTick: new Float64Array(0), channel: new Uint16Array(0) },
      detector,
    );
    expect(checkOf(output, 'image-shows')?.status).toBe('fail');
    expect(output.quantities['visibility.raw']).toBeUndefined();
  });
});
