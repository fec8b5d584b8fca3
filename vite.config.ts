/** How the pages are built and, in development, served beside the API. */
import tailwindcss from '@tailwindcss/vite'
import react from '@vitejs/plugin-react'
import { defineConfig } from 'vite'

export default defineConfig({
  plugins: [react(), tailwindcss()],
  publicDir: 'src/public',
  build: { outDir: 'dist', emptyOutDir: true },
  server: { host: '127.0.0.1', proxy: { '/api': process.env['EVENBURN_API'] ?? 'http://127.0.0.1:4101' } },
})
