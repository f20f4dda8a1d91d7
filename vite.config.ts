import preact from '@preact/preset-vite';
import { defineConfig } from 'vite';

export default defineConfig({
  root: 'client',
  plugins: [preact()],
  build: { outDir: '../dist/client', emptyOutDir: true, target: 'es2022', assetsInlineLimit: 0, sourcemap: false },
});
