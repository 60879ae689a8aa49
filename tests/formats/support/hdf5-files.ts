import h5wasm from 'h5wasm/node';
import type { Hdf5FramesLayout, Hdf5TagsLayout } from '../../../shared/contracts/layout';
import { inspectSource } from '../../../workers/formats/registry';
import { nodeEnvironment } from '../../../workers/pipeline/hdf5-node';
import { type DatasetToWrite, writeHdf5 } from './hdf5-writer';
import { fileSource, makeFolder } from './sources';

/** A folder of HDF5 files, written under the name "unknown…": the name must not be needed. */
export async function makeHdf5Folder() {
  const folder = await makeFolder();
  await h5wasm.ready;
  let files = 0;
  return {
    ...folder,
    write: async (
      datasets: DatasetToWrite[],
      options: Parameters<typeof writeHdf5>[2] = {},
    ): Promise<string> => {
      files += 1;
      return writeHdf5(folder.path(`unknown${files}`), datasets, options);
    },
  };
}

export function tagsLayout(time: Hdf5TagsLayout['time'], channel: Hdf5TagsLayout['channel']): Hdf5TagsLayout {
  return { version: 1, format: 'hdf5', kind: 'tags', time, channel, tickFs: 1000 };
}

export function framesLayout(dataset: string): Hdf5FramesLayout {
  return { version: 1, format: 'hdf5', kind: 'frames', dataset };
}

export async function inspect(path: string, layout: Hdf5TagsLayout | Hdf5FramesLayout | null = null) {
  const source = await fileSource(path);
  try {
    return await inspectSource(source, layout, nodeEnvironment);
  } finally {
    await source.close();
  }
}

/** Rising times that pass 2^53, with channels. */
export const count = 3000;
export const ticks = Array.from(
  { length: count },
  (_, i) => 2n ** 53n - 5000n + 3n * BigInt(i) + (i > 2000 ? 2n ** 60n : 0n),
);
export const channels = Array.from({ length: count }, (_, i) => (i * 37) % 512);
