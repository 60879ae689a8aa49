import type { ReaderEnvironment } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';
import { openOrRefuse } from './hdf5-refusal';

let mounts = 0;

/**
 * HDF5 in a web worker: the picked file is mounted, and the library reads the parts it needs (synchronous reads exist
 * in workers only). Loaded on first use, 4 MB with its WASM inside; needs 'wasm-unsafe-eval'.
 */
export const browserEnvironment: ReaderEnvironment = {
  openHdf5: async (source) => {
    const { file: data } = source.ref;
    if (!(data instanceof Blob)) {
      throw new Problem(
        'missing-input',
        `Expected the file ${source.name} itself, found only its name; pick it again.`,
        source.name,
      );
    }
    const { default: h5wasm } = await import('h5wasm');
    const module = await h5wasm.ready;
    // Errors become exceptions instead of long prints in the console.
    module.activate_throwing_error_handler();
    const { FS } = module;
    mounts += 1;
    const folder = `/mounted-${mounts}`;
    FS.mkdir(folder);
    // Under a name of our own: names of picked files hold anything.
    FS.mount(FS.filesystems.WORKERFS, { blobs: [{ name: 'source.h5', data }] }, folder);
    const release = (): void => {
      FS.unmount(folder);
      FS.rmdir(folder);
    };
    try {
      const file = openOrRefuse(() => new h5wasm.File(`${folder}/source.h5`, 'r'), source.name);
      return {
        file,
        module,
        close: () => {
          file.close();
          release();
        },
      };
    } catch (thrown) {
      release();
      throw thrown;
    }
  },
};
