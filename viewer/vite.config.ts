import { resolve, sep } from 'node:path';
import { defineConfig } from 'vite';

const library = resolve(import.meta.dirname, '../src') + sep;

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
    rolldownOptions: {
      // The viewer prints nothing; the library of solids, whose loader asks for node's modules, stays out with what uses it.
      external: ['manifold-3d'],
      treeshake: {
        // The library's modules do nothing when they are loaded, so what the viewer does not use stays out: above all the
        // spec's schemas, whose package tries `new Function`, which the view server's policy forbids.
        moduleSideEffects: (id) => !id.startsWith(library),
      },
    },
  },
});
