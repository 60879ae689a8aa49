import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, statSync } from 'node:fs';
import { join } from 'node:path';
import type { Reader } from '../../shared/contracts/reader';
import type { TagSpec, TagTally } from '../../shared/contracts/tally';
import type { CompiledKernels } from '../../workers/accumulators/compiled-kernels';
import { PairCache } from '../../workers/accumulators/pair-cache';
import { createTagAccumulator, type TagAccumulator } from '../../workers/accumulators/tag-accumulator';
import { openReader } from '../../workers/formats/registry';
import { createRecordDecoding } from '../../workers/kernels/tag-decode';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { loadKernels } from '../../workers/pipeline/kernels';
import { compileKernels } from '../../workers/pipeline/kernels-node';
import { openPathSource } from '../../workers/pipeline/node-source';
import { buildArm, buildTagSpec } from '../../workers/studies/tag-spec';
import { assertSameAnswer } from './compare';
import type { BenchSettings } from './measure';
import { longRecords } from './presets';
import { describeGoal, judge, type ReportRow } from './report';
import { median } from './statistics';
import { benchFolder } from './tools';

/** About 0.56 pairs a record lie within 250 ns in the long files: 5 million in all. */
const RECORDS = 9_000_000;
const KEPT_TICK = 250_000;
const mark = { goal: 100, least: 30, label: 'x reading again' };

/** Another window and delay from the pairs that were kept, against reading the file again for them. One thread. */
export async function measurePairCache(settings: BenchSettings): Promise<ReportRow> {
  const folder = mkdtempSync(join(settings.folder, 'pair-cache-'));
  try {
    const args = [`${benchFolder}/numpy/make_data.py`, 'long_records', folder, String(RECORDS), 'near'];
    if (spawnSync(settings.python, args, { stdio: 'inherit' }).status !== 0)
      throw new Error('The file of the pair cache could not be made.');
    const path = join(folder, 'near.bin');
    const kernels = await loadKernels(compileKernels);
    if (kernels.tags === null) throw new Error('The compiled kernels are missing; run "npm run build:wasm".');
    const source = await openPathSource({ name: 'near.bin', size: statSync(path).size, path });
    const records = createRecordDecoding(kernels.tags);
    const reader = await openReader(source, longRecords, { ...nodeEnvironment, records });
    const keeping = {
      ...specOf(1200, 20_000),
      keepPairs: { minTauTick: -KEPT_TICK, maxTauTick: KEPT_TICK, most: 2 ** 26 },
    };
    const all = await count(reader, keeping, kernels);
    const kept = all.kept();
    if (kept === null) throw new Error('The pairs were not kept.');
    const cache = new PairCache(keeping, keeping.keepPairs, all.tally(), kept);

    const dials: number[] = [];
    const bytes: number[] = [];
    for (let turn = 0; turn <= settings.passes; turn++) {
      const asked = specOf(1000 + 150 * turn, 20_000 + 20 * turn);
      const fromPairs = await timed(dials, turn > 0, async () => cache.recount(asked));
      const again = await timed(bytes, turn > 0, async () => (await count(reader, asked, kernels)).tally());
      if (fromPairs === null) throw new Error('The kept pairs do not tell of another window.');
      for (const [what, found, expected] of answersOf(fromPairs, again))
        assertSameAnswer(`the pair cache, ${what}`, found, expected, { tolerance: 0, sections: 1 });
    }
    await reader.close();
    const figure = median(bytes) / median(dials);
    return {
      kernel: `dial change on ${(cache.pairs / 1e6).toFixed(1)} M kept pairs`,
      rate: figure,
      unit: 'x reading again',
      ratioNumpy: null,
      ratioCpp: null,
      peakMB: null,
      growth: null,
      goal: describeGoal([mark]),
      met: judge([{ ...mark, figure }]),
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

function specOf(windowPs: number, delayPs: number): TagSpec {
  const map = (firstChannel: number) => ({
    width: 16,
    height: 16,
    firstChannel,
    order: 'rows' as const,
    flipX: false,
    flipY: false,
    pitchUm: 50,
    maskedPixels: [],
    delayPs: 0,
    pixelDelayPs: [],
  });
  return buildTagSpec({
    a: buildArm(map(0), 1000),
    b: buildArm(map(256), 1000),
    tickFs: 1000,
    delayPs,
    windowPs,
    shiftStepPs: 20_000,
    shiftCount: 10,
    histogramRangePs: 100_000,
    histogramBinPs: 100,
  });
}

async function count(reader: Reader, spec: TagSpec, kernels: CompiledKernels): Promise<TagAccumulator> {
  const accumulator = createTagAccumulator(spec, kernels.tags);
  for await (const block of reader.read({ start: 0, end: RECORDS }, 0n, { cancelled: false })) {
    if (block.kind !== 'tags') throw new Error('Records were read as frames.');
    accumulator.push(block);
  }
  return accumulator;
}

async function timed<T>(seconds: number[], counts: boolean, work: () => Promise<T>): Promise<T> {
  const before = process.cpuUsage();
  const found = await work();
  const { user, system } = process.cpuUsage(before);
  if (counts) seconds.push((user + system) / 1e6);
  return found;
}

function answersOf(found: TagTally, expected: TagTally): [string, Float64Array, Float64Array][] {
  return [
    ['histogram', found.histogram.counts, expected.histogram.counts],
    ['prompt joint map', found.prompt.jointX, expected.prompt.jointX],
    ['shifted joint map', found.shifted.jointX, expected.shifted.jointX],
    ['prompt image', found.prompt.imageB, expected.prompt.imageB],
  ];
}
