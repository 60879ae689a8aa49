import tailwindcss from '@tailwindcss/vite';
import react from '@vitejs/plugin-react';
import { defineConfig } from 'vite';

/** Cross-origin isolation in development too, so that SharedArrayBuffer behaves as it does in production. */
const isolation = {
  'Cross-Origin-Opener-Policy': 'same-origin',
  'Cross-Origin-Embedder-Policy': 'require-corp',
};

export default defineConfig({
  plugins: [react(), tailwindcss()],
  build: { outDir: 'dist/client', emptyOutDir: true, assetsInlineLimit: 0 },
  worker: { format: 'es' },
  // Vite does not look into workers/ by itself and would reload the page when it first meets their packages.
  optimizeDeps: { entries: ['index.html', 'workers/entries/*.worker.ts'], exclude: ['h5wasm'] },
  server: {
    port: 5173,
    strictPort: true,
    headers: isolation,
    proxy: {
      '/api': { target: `http://127.0.0.1:${process.env.GEMEL_API_PORT ?? '4310'}`, changeOrigin: false },
    },
  },
});
