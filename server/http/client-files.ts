import { readFileSync } from 'node:fs'
import path from 'node:path'
import express, { type RequestHandler, Router } from 'express'
import type { Config } from '#server/config.ts'
import { AppError } from './app-error.ts'
import { compressedAssets } from './compressed-assets.ts'
import { nothingHere } from './problems.ts'
import { allowNonce } from './security-headers.ts'

/** The client: either the built files, or the bundler of the development server. */
export type ClientSource =
  | { kind: 'built'; directory: string }
  | {
      kind: 'bundler'
      middleware: RequestHandler
      transform: (url: string, html: string) => Promise<string>
      html: string
    }

/** What index.html holds where the nonce belongs. */
const noncePlaceholder = '%CSP_NONCE%'

/** Addresses that are never a screen of the client (one may end in a revision's mark, 2.1.0). */
const notAScreen = /^\/(api|collab|assets|healthz|readyz)(\/|$)|\/\.|\.[a-z][a-z0-9]{1,4}$/i

/** Every address of the client answers index.html with a nonce of its own, never kept; built assets carry a hash and are kept for good. */
export function clientFiles(config: Config, source: ClientSource): Router {
  const router = Router()
  router.use('/index.html', nothingHere)
  if (source.kind === 'bundler') router.use(source.middleware)
  else {
    const assets = path.join(source.directory, 'assets')
    const options = { index: false, redirect: false, dotfiles: 'ignore', fallthrough: true } as const
    router.use('/assets', compressedAssets(assets))
    router.use('/assets', express.static(assets, { ...options, immutable: true, maxAge: '1y' }))
    router.use(express.static(source.directory, { ...options, maxAge: 0, extensions: false }))
  }
  const read = () =>
    source.kind === 'built'
      ? readFileSync(path.join(source.directory, 'index.html'), 'utf8')
      : readFileSync(source.html, 'utf8')
  let built: string | undefined
  router.get('/{*path}', async (request, response) => {
    response.locals.route = 'client'
    if (notAScreen.test(request.path)) throw new AppError('not-found', 'There is nothing at this address.')
    built = source.kind === 'built' ? (built ?? read()) : await source.transform(request.originalUrl, read())
    const nonce = allowNonce(config, response)
    response.setHeader('Cache-Control', 'no-store')
    response.type('html').send(built.replaceAll(noncePlaceholder, nonce))
  })
  return router
}
