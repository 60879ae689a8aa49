import { open, rm, stat, writeFile } from 'node:fs/promises';
import { setImmediate } from 'node:timers/promises';
import type { TagBlock } from '../../shared/contracts/blocks';
import {
  channelsOf,
  type FrameScenario,
  type Scenario,
  type TagScenario,
} from '../../shared/contracts/scenario';
import { Cancelled, Problem } from '../../shared/errors/problem';
import { tickSpanToSeconds } from '../../shared/units/ticks';
import { simulateFrames } from '../simulate/frames';
import { createRecordPacker } from '../simulate/records';
import { simulateTags } from '../simulate/tags';
import { createFrameFile, createTagFile } from './hdf5-writer';

/** What was written. */
export interface SimulatedFile {
  file: string;
  bytes: number;
  kind: 'tags' | 'frames';
  /** Tags or frames. */
  count: number;
  /** File that says how to read records; null where the file describes itself. */
  layoutFile: string | null;
}

/** One step of work: fraction of the run that has been written. */
type OnStep = (fraction: number, count: number) => Promise<void>;

/**
 * Writes a simulated acquisition: `.h5` or `.hdf5` for HDF5, `.bin` for records (with `.layout.json` beside it). Memory
 * stays bounded whatever the length. `onProgress` gets a line of text now and then.
 * @throws Problem for a name without a known ending or a folder that cannot be written; Cancelled, and then no file is left.
 */
export async function simulateToFile(
  scenario: Scenario,
  path: string,
  onProgress: (text: string) => void,
  isCancelled: () => boolean,
): Promise<SimulatedFile> {
  const write = writerFor(scenario, path);
  let told = 0;
  const onStep: OnStep = async (fraction, count) => {
    await setImmediate();
    if (isCancelled()) throw new Cancelled();
    if (Date.now() - told < 500) return;
    told = Date.now();
    onProgress(`${scenario.name}: ${(100 * fraction).toFixed(0)} %, ${count} ${scenario.kind} written`);
  };
  // Asked of the system first: the HDF5 library would print its own account of a folder that is not there.
  await (await openToWrite(path)).close();
  try {
    const { count, layoutFile } = await write(onStep);
    const { size } = await stat(path);
    return { file: path, bytes: size, kind: scenario.kind, count, layoutFile };
  } catch (thrown) {
    // A file cut short would pass for a shorter acquisition.
    await rm(path, { force: true });
    throw thrown;
  }
}

type Write = (onStep: OnStep) => Promise<{ count: number; layoutFile: string | null }>;

function writerFor(scenario: Scenario, path: string): Write {
  if (/\.(h5|hdf5)$/i.test(path)) {
    return scenario.kind === 'tags'
      ? (onStep) => writeTags(scenario, path, onStep)
      : (onStep) => writeFrames(scenario, path, onStep);
  }
  if (/\.bin$/i.test(path) && scenario.kind === 'tags') {
    assertChannelsFit(scenario);
    return (onStep) => writeRecords(scenario, path, onStep);
  }
  throw new Problem(
    'bad-input',
    `A simulated ${scenario.kind} file ends in .h5${scenario.kind === 'tags' ? ' or .bin' : ''}, found ${path}; change the name.`,
    '--out',
  );
}

async function writeTags(scenario: TagScenario, path: string, onStep: OnStep): ReturnType<Write> {
  const writer = await createTagFile(path, scenario);
  let count = 0;
  try {
    for (const block of simulateTags(scenario)) {
      const times = new BigUint64Array(block.count);
      for (let i = 0; i < block.count; i++) times[i] = block.baseTick + BigInt(block.deltaTick[i]!);
      writer.append(times, block.channel);
      count += block.count;
      await onStep(fractionOf(scenario, block), count);
    }
  } finally {
    writer.close();
  }
  return { count, layoutFile: null };
}

async function writeFrames(scenario: FrameScenario, path: string, onStep: OnStep): ReturnType<Write> {
  const writer = await createFrameFile(path, scenario);
  let count = 0;
  try {
    for (const block of simulateFrames(scenario)) {
      writer.append(block.pixels);
      count += block.count;
      await onStep(count / scenario.frames, count);
    }
  } finally {
    writer.close();
  }
  return { count, layoutFile: null };
}

async function writeRecords(scenario: TagScenario, path: string, onStep: OnStep): ReturnType<Write> {
  const packer = createRecordPacker(scenario.file.recordBytes, scenario.tickFs);
  const layoutFile = path.replace(/\.bin$/i, '.layout.json');
  const handle = await openToWrite(path);
  let count = 0;
  try {
    for (const block of simulateTags(scenario)) {
      await handle.appendFile(packer.pack(block));
      count += block.count;
      await onStep(fractionOf(scenario, block), count);
    }
  } finally {
    await handle.close();
  }
  await writeFile(layoutFile, `${JSON.stringify(packer.layout, null, 2)}\n`);
  return { count, layoutFile };
}

async function openToWrite(path: string): ReturnType<typeof open> {
  try {
    return await open(path, 'w');
  } catch (thrown) {
    const why = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem('unreadable', `The file ${path} cannot be written: ${why}.`, path);
  }
}

function assertChannelsFit(scenario: TagScenario): void {
  if (scenario.file.recordBytes === 8) return;
  for (const arm of ['signal', 'idler'] as const) {
    const last = channelsOf(scenario[arm])[1];
    if (last > 1023) {
      throw new Problem(
        'bad-input',
        `Records of 4 bytes hold channels up to 1023, the ${arm} arm reaches ${last}; set file.recordBytes to 8.`,
        'file.recordBytes',
      );
    }
  }
}

function fractionOf(scenario: TagScenario, block: TagBlock): number {
  const last = block.baseTick + BigInt(block.deltaTick[block.count - 1] ?? 0);
  return tickSpanToSeconds(last, scenario.tickFs) / scenario.seconds;
}
