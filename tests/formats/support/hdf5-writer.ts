import h5wasm, { type Dtype, type FileOptions, type GuessableDataTypes } from 'h5wasm/node';

export interface DatasetToWrite {
  name: string;
  data: GuessableDataTypes;
  shape?: number[];
  dtype?: Dtype;
  chunks?: number[];
  gzip?: boolean;
  attributes?: Record<string, number>;
}

/** A file written by the HDF5 library itself. Groups in names are made on the way. */
export async function writeHdf5(
  path: string,
  datasets: readonly DatasetToWrite[],
  options: FileOptions & { attributes?: Record<string, number> } = {},
): Promise<string> {
  await h5wasm.ready;
  const { attributes, ...fileOptions } = options;
  const file = new h5wasm.File(path, 'w', fileOptions);
  const groups = new Set<string>();
  for (const { name, data, shape, dtype, chunks, gzip, attributes: own } of datasets) {
    const group = name.slice(0, Math.max(0, name.lastIndexOf('/')));
    if (group !== '' && !groups.has(group)) {
      file.create_group(group);
      groups.add(group);
    }
    const dataset = file.create_dataset({
      name,
      data,
      shape: shape ?? null,
      dtype: dtype ?? null,
      chunks: chunks ?? null,
      ...(gzip ? { compression: 'gzip' as const, compression_opts: 4 } : {}),
    });
    for (const [attribute, value] of Object.entries(own ?? {})) dataset.create_attribute(attribute, value);
  }
  for (const [attribute, value] of Object.entries(attributes ?? {})) file.create_attribute(attribute, value);
  file.close();
  return path;
}
