import { defineConfig } from 'vite';

export default defineConfig({
  build: {
    outDir: '../dist/client',
    emptyOutDir: true,
    target: 'es2022',
    modulePreload: { polyfill: false },
  },
});
