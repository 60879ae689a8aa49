import type { ReaderEnvironment } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';
import { openOrRefuse } from './hdf5-refusal';

/** HDF5 in Node: the library reads real paths itself. Loaded on first use, 4 MB. */
export const nodeEnvironment: ReaderEnvironment = {
  openHdf5: async (source) => {
    const { path } = source.ref;
    if (path === undefined) {
      throw new Problem(
        'missing-input',
        `Expected a path for ${source.name}, found none; name the file.`,
        source.name,
      );
    }
    const { default: h5wasm } = await import('h5wasm/node');
    const module = await h5wasm.ready;
    // Errors become exceptions instead of long prints on stderr.
    module.activate_throwing_error_handler();
    const file = openOrRefuse(() => new h5wasm.File(path, 'r'), source.name);
    return { file, module, close: () => void file.close() };
  },
};
