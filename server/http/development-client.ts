import type { Server } from 'node:http'
import { fileURLToPath } from 'node:url'
import { createServer } from 'vite'
import type { ClientSource } from './client-files.ts'

const root = fileURLToPath(new URL('../..', import.meta.url))

/** The bundler inside this server, for `npm run dev`: pages change as their files are saved. */
export async function developmentClient(server: Server): Promise<{ source: ClientSource; close(): Promise<void> }> {
  const vite = await createServer({
    root,
    appType: 'custom',
    server: { middlewareMode: { server }, hmr: { server } },
  })
  return {
    source: {
      kind: 'bundler',
      middleware: vite.middlewares,
      transform: (url, html) => vite.transformIndexHtml(url, html),
      html: fileURLToPath(new URL('../../index.html', import.meta.url)),
    },
    close: () => vite.close(),
  }
}
