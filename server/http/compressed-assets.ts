import { readFile } from 'node:fs/promises'
import path from 'node:path'
import { promisify } from 'node:util'
import { brotliCompress, constants, gzip } from 'node:zlib'
import type { RequestHandler } from 'express'

const text = /^\/[A-Za-z0-9_-][A-Za-z0-9._-]*\.(?:js|css|svg|json|ttf)$/
const brotli = promisify(brotliCompress)
const compress = {
  br: (data: Buffer) => brotli(data, { params: { [constants.BROTLI_PARAM_QUALITY]: 9 } }),
  gzip: promisify(gzip),
}

/**
 * Built assets as text, compressed once and kept: their names carry a hash of their content, so what is kept is never
 * old. What it does not serve (fonts and pictures are compressed already, other encodings, other methods) goes on to the
 * next handler. Only fixed files of the build are compressed, never an answer that carries anything of a person.
 */
export function compressedAssets(directory: string): RequestHandler {
  const kept = new Map<string, Promise<Buffer | null>>()

  async function make(name: string, encoding: keyof typeof compress): Promise<Buffer | null> {
    const data = await readFile(path.join(directory, name)).catch(() => null)
    return data && compress[encoding](data)
  }

  return async (request, response, next) => {
    if (request.method !== 'GET' || request.headers.range !== undefined || !text.test(request.path)) return next()
    response.vary('Accept-Encoding')
    // Browsers list what they take in no order of liking: the smaller one is ours to choose.
    const encoding = (['br', 'gzip'] as const).find((one) => request.acceptsEncodings(one) === one)
    if (!encoding) return next()
    const key = `${encoding} ${request.path}`
    const data = kept.get(key) ?? make(request.path, encoding)
    kept.set(key, data)
    const body = await data
    if (!body) {
      kept.delete(key)
      return next()
    }
    response.type(path.extname(request.path))
    response.setHeader('Content-Encoding', encoding)
    response.setHeader('Cache-Control', 'public, max-age=31536000, immutable')
    response.send(body)
  }
}
