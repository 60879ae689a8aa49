import { cpSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vite';

const root = fileURLToPath(new URL('..', import.meta.url));

/** The server as one module beside its migrations; packages stay in node_modules. */
export default defineConfig({
  root,
  publicDir: false,
  build: {
    ssr: 'server/entry/main.ts',
    outDir: 'dist/server',
    emptyOutDir: true,
    target: 'node20',
    rolldownOptions: { output: { entryFileNames: 'main.js' } },
  },
  plugins: [
    {
      name: 'copy-migrations',
      closeBundle() {
        cpSync(`${root}/server/data/migrations`, `${root}/dist/server/migrations`, { recursive: true });
      },
    },
  ],
});
