import { copyFileSync, mkdirSync, readdirSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vite';

const root = fileURLToPath(new URL('..', import.meta.url));
const kernels = 'kernels/wasm/build';

/**
 * The command line and its threads as plain modules: TypeScript compiled at every start costs seconds. They lie as deep
 * as in the sources, so that both find the compiled kernels by the same relative address.
 */
export default defineConfig({
  root,
  publicDir: false,
  // One file loads faster than the hundreds of a package; HDF5 stays outside, it looks for its WASM beside itself.
  ssr: { noExternal: true, external: ['h5wasm'] },
  build: {
    ssr: true,
    outDir: 'dist/cli',
    emptyOutDir: true,
    target: 'node20',
    rolldownOptions: {
      input: ['workers/entries/cli.ts', 'workers/entries/compute.node.ts'],
      output: { entryFileNames: 'entries/[name].js', chunkFileNames: 'entries/[name].js' },
    },
  },
  plugins: [
    {
      name: 'copy-kernels',
      closeBundle() {
        mkdirSync(`${root}/dist/cli/${kernels}`, { recursive: true });
        for (const name of readdirSync(`${root}/workers/${kernels}`)) {
          copyFileSync(`${root}/workers/${kernels}/${name}`, `${root}/dist/cli/${kernels}/${name}`);
        }
      },
    },
  ],
});
