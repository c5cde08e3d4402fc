import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vite';

/** Builds the page to `dist/web`: files of our own alone, so that it runs where nothing else is reached. */
export default defineConfig({
  root: fileURLToPath(new URL('.', import.meta.url)),
  // Addresses are relative, so that the page can stand below any path.
  base: './',
  oxc: { jsx: { runtime: 'automatic', importSource: 'preact' } },
  build: {
    outDir: '../../dist/web',
    emptyOutDir: true,
    // A data address in the page would break its content security policy.
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    chunkSizeWarningLimit: 1200,
    reportCompressedSize: false,
    // Of the contract only what the page uses: making a schema has no effect on anything else.
    rolldownOptions: {
      treeshake: { moduleSideEffects: [{ test: /\/src\/contract\//, sideEffects: false }] },
    },
  },
});
