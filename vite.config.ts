/** The build of the window: one page, its workers under names by which the host gives them their own content policy. */
import react from '@vitejs/plugin-react';
import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vite';

export default defineConfig({
  root: fileURLToPath(new URL('./renderer', import.meta.url)),
  base: './',
  plugins: [react()],
  worker: {
    format: 'es',
    rollupOptions: {
      output: { entryFileNames: 'assets/[name]-[hash].js', chunkFileNames: 'assets/worker-[name]-[hash].js' },
    },
  },
  build: {
    outDir: fileURLToPath(new URL('./dist/window', import.meta.url)),
    emptyOutDir: true,
    target: 'es2023',
    // The content policy knows neither inline scripts nor data addresses for scripts.
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    chunkSizeWarningLimit: 4000,
  },
});
