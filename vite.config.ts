import tailwindcss from '@tailwindcss/vite'
import react from '@vitejs/plugin-react'
import { defineConfig } from 'vite'

// The pages are served under a strict content security policy: no inlined assets, no inline preload script.
export default defineConfig({
  plugins: [react(), tailwindcss()],
  worker: { format: 'es' },
  optimizeDeps: { include: ['mathjs/number'] },
  build: {
    outDir: 'dist',
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    target: 'es2022',
    sourcemap: false,
    chunkSizeWarningLimit: 700,
    rolldownOptions: {
      output: {
        codeSplitting: {
          // The checker of answers stands in one piece with the setting that forbids it to compile its checks: whatever
          // imports the one has run the other. In pieces of their own the order would be the bundler's choice.
          groups: [
            { name: 'zod', test: /node_modules\/zod\/|src\/lib\/no-eval\.ts/ },
            // What several screens share comes in one piece instead of thirty of half a kilobyte.
            { name: 'kit', test: /src\/(components|hooks|lib|api)\/|node_modules\/lucide-react\//, minShareCount: 2 },
          ],
        },
      },
    },
  },
})
