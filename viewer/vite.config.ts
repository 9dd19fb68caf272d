import { defineConfig } from 'vite';

export default defineConfig({
  root: import.meta.dirname,
  base: './',
  build: {
    outDir: '../dist/viewer',
    emptyOutDir: true,
    target: 'es2022',
    // three is one chunk of about 500 kB, and nothing is fetched over a slow line.
    chunkSizeWarningLimit: 1200,
    modulePreload: { polyfill: false },
  },
});
