import h5wasm, { type Dataset, type Group, type File as Hdf5File } from 'h5wasm/node';
import type { FrameScenario, TagScenario } from '../../shared/contracts/scenario';
import { Problem } from '../../shared/errors/problem';

/** Rows of a growing dataset: whole chunks are written at once, so that none is compressed twice. */
type Column = BigUint64Array | Uint16Array | Uint8Array;

const TAGS_PER_CHUNK = 65536;
/** Small enough that a reader who wants one frame does not unpack many. */
const FRAME_CHUNK_BYTES = 262144;

export interface Hdf5Writer<Row extends Column[]> {
  append(...rows: Row): void;
  close(): void;
}

/** `structure: recent` keeps the chunk index of HDF5 1.10; `classic` that of 1.8. */
async function createFile(path: string, structure: 'classic' | 'recent'): Promise<Hdf5File> {
  await h5wasm.ready;
  const file = new h5wasm.File(path, 'w', { libver: structure === 'classic' ? 'v108' : 'v110' });
  // The library does not throw; it answers a handle of -1.
  if (file.file_id < 0n) {
    throw new Problem(
      'unreadable',
      `The file ${path} cannot be written; check the folder and its permissions.`,
      path,
    );
  }
  return file;
}

export async function createTagFile(
  path: string,
  scenario: TagScenario,
): Promise<Hdf5Writer<[BigUint64Array, Uint16Array]>> {
  const { file: layout, tickFs } = scenario;
  const file = await createFile(path, layout.structure);
  file.create_attribute('scenario', JSON.stringify(scenario));
  const time = createColumn(file, layout.time, new BigUint64Array(TAGS_PER_CHUNK), [], layout.gzip);
  const channel = createColumn(file, layout.channel, new Uint16Array(TAGS_PER_CHUNK), [], layout.gzip);
  time.dataset.create_attribute('tick_fs', tickFs, [], '<d');
  return {
    append(times, channels) {
      time.append(times);
      channel.append(channels);
    },
    close() {
      time.flush();
      channel.flush();
      file.close();
    },
  };
}

export async function createFrameFile(
  path: string,
  scenario: FrameScenario,
): Promise<Hdf5Writer<[Uint8Array | Uint16Array]>> {
  const { file: layout, camera } = scenario;
  const file = await createFile(path, layout.structure);
  file.create_attribute('scenario', JSON.stringify(scenario));
  const size = camera.width * camera.height;
  const wide = layout.type === 'uint16';
  const perChunk = Math.max(1, Math.floor(FRAME_CHUNK_BYTES / (size * (wide ? 2 : 1))));
  const buffer = wide ? new Uint16Array(perChunk * size) : new Uint8Array(perChunk * size);
  const frames = createColumn(file, layout.dataset, buffer, [camera.height, camera.width], layout.gzip);
  return {
    append: (pixels) => frames.append(pixels),
    close() {
      frames.flush();
      file.close();
    },
  };
}

interface GrowingColumn {
  dataset: Dataset;
  append(values: Column): void;
  flush(): void;
}

function createColumn(
  file: Hdf5File,
  path: string,
  buffer: Column,
  rowShape: number[],
  gzip: number,
): GrowingColumn {
  const rowSize = rowShape.reduce((product, side) => product * side, 1);
  const rowRanges = rowShape.map((side): [number, number] => [0, side]);
  const names = path.split('/').slice(1);
  const name = names.pop() ?? path;
  let group: Group = file;
  for (const next of names) {
    const found = group.keys().includes(next) ? group.get(next) : group.create_group(next);
    group = found as Group;
  }
  const dataset = group.create_dataset({
    name,
    data: buffer.slice(0, 0),
    shape: [0, ...rowShape],
    maxshape: [null, ...rowShape],
    chunks: [buffer.length / rowSize, ...rowShape],
    ...(gzip > 0 ? { compression: 'gzip' as const, compression_opts: gzip } : {}),
  });
  let written = 0;
  let held = 0;
  const flush = (): void => {
    if (held === 0) return;
    const rows = held / rowSize;
    dataset.resize([written + rows, ...rowShape]);
    dataset.write_slice([[written, written + rows], ...rowRanges], buffer.slice(0, held));
    written += rows;
    held = 0;
  };
  return {
    dataset,
    append(values) {
      let from = 0;
      while (from < values.length) {
        const take = Math.min(buffer.length - held, values.length - from);
        // Both sides have the type of the dataset; the union hides it.
        (buffer as Uint8Array).set((values as Uint8Array).subarray(from, from + take), held);
        held += take;
        from += take;
        if (held === buffer.length) flush();
      }
    },
    flush,
  };
}
