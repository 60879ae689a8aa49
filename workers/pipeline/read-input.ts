import type { RunInput, SourceRef } from '../../shared/contracts/engine';
import type { Layout } from '../../shared/contracts/layout';
import type { ByteSource, Reader, ReaderEnvironment } from '../../shared/contracts/reader';
import { openClockPair } from '../formats/clock-pair';
import { openReader } from '../formats/registry';
import { openSequence } from '../formats/sequence';

/** What an acquisition is read from. */
export type ReadInput = Pick<RunInput, 'source' | 'layout' | 'following' | 'companion'>;

export interface InputPlatform {
  openSource(ref: SourceRef): Promise<ByteSource>;
  environment: ReaderEnvironment;
}

/** Every file an input reads from, with the layout it is read by, in order. */
export function filesOf(input: ReadInput): { source: SourceRef; layout: Layout }[] {
  const own = sourcesOf(input).map((source) => ({ source, layout: input.layout }));
  return input.companion === undefined ? own : [...own, input.companion];
}

const sourcesOf = ({ source, following }: ReadInput): SourceRef[] => [source, ...(following ?? [])];

export function bytesOfInput(input: ReadInput): number {
  return filesOf(input).reduce((sum, { source }) => sum + source.size, 0);
}

/** Equal for the same bytes read the same way; null where a file has no key and so may change. */
export function keyOfInput(input: ReadInput): string | null {
  const files = filesOf(input);
  if (files.some(({ source }) => source.key === undefined)) return null;
  return JSON.stringify([
    files.map(({ source, layout }) => [source.key, source.size, layout]),
    input.companion?.channelOffset,
    input.companion?.clock,
  ]);
}

/**
 * Opens all files of an input as one reader, or none of them. Closing the reader closes them. The clock of a companion
 * must be known by then.
 */
export async function openInput(input: ReadInput, platform: InputPlatform): Promise<Reader> {
  const { companion } = input;
  const main = await openMain(input, platform);
  if (companion === undefined) return main;
  const opened = [main];
  try {
    if (companion.clock === null) throw new Error('A companion is read before its clock is known.');
    const second = await openCompanion(input, platform);
    opened.push(second);
    return await openClockPair(
      { name: input.source.name, reader: main, bytes: bytesOfInput({ ...input, companion: undefined }) },
      { name: companion.source.name, reader: second, bytes: companion.source.size },
      { channelOffset: companion.channelOffset, clock: companion.clock },
    );
  } catch (thrown) {
    for (const reader of opened) await reader.close();
    throw thrown;
  }
}

/** The files of the main clock. */
export async function openMain(input: ReadInput, platform: InputPlatform): Promise<Reader> {
  const opened: { name: string; reader: Reader }[] = [];
  try {
    for (const source of sourcesOf(input)) {
      opened.push({ name: source.name, reader: await openFile(source, input.layout, platform) });
    }
    return opened.length === 1 ? opened[0]!.reader : await openSequence(opened, input.layout);
  } catch (thrown) {
    for (const { reader } of opened) await reader.close();
    throw thrown;
  }
}

export async function openCompanion(
  { source, companion }: ReadInput,
  platform: InputPlatform,
): Promise<Reader> {
  if (companion !== undefined) return openFile(companion.source, companion.layout, platform);
  throw new Error(`${source.name} has no companion.`);
}

async function openFile(ref: SourceRef, layout: Layout, platform: InputPlatform): Promise<Reader> {
  const source = await platform.openSource(ref);
  try {
    return await openReader(source, layout, platform.environment);
  } catch (thrown) {
    await source.close();
    throw thrown;
  }
}
