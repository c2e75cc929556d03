import { randomBytes } from 'node:crypto'
import type { RequestHandler, Response } from 'express'
import helmet from 'helmet'
import type { Config } from '#server/config.ts'

/** The content security policy; the nonce is for the editor's own style sheet. */
export function contentSecurityPolicy(config: Config, nonce?: string): string {
  // A policy cannot name an IPv6 address; a browser that ignores the entry says so in its console.
  const sockets = config.origins
    .filter((origin) => !origin.includes('['))
    .map((origin) => origin.replace(/^http/, 'ws'))
  return [
    "default-src 'none'",
    "script-src 'self'",
    nonce === undefined ? "style-src 'self'" : `style-src 'self' 'nonce-${nonce}'`,
    "style-src-attr 'none'",
    "img-src 'self' data:",
    "font-src 'self'",
    // Older browsers do not count the library's own sockets to 'self'.
    `connect-src 'self' ${sockets.join(' ')}`,
    "worker-src 'self'",
    "manifest-src 'self'",
    "frame-ancestors 'none'",
    "base-uri 'none'",
    "form-action 'self'",
    "object-src 'none'",
  ].join('; ')
}

export const newNonce = (): string => randomBytes(16).toString('base64')

/** Headers of every answer, errors too. In development there is no policy: the bundler puts scripts into the page. */
export function securityHeaders(config: Config): RequestHandler[] {
  const common = helmet({
    contentSecurityPolicy: false,
    strictTransportSecurity: config.secure ? { maxAge: 31_536_000, includeSubDomains: true } : false,
    referrerPolicy: { policy: 'same-origin' },
    xFrameOptions: { action: 'deny' },
    crossOriginOpenerPolicy: { policy: 'same-origin' },
    crossOriginResourcePolicy: { policy: 'same-origin' },
    xPoweredBy: false,
  })
  const policy = contentSecurityPolicy(config)
  return [
    common,
    (_request, response, next) => {
      if (config.mode !== 'development') response.setHeader('Content-Security-Policy', policy)
      response.setHeader('Permissions-Policy', 'camera=(), geolocation=(), microphone=(), payment=(), usb=()')
      next()
    },
  ]
}

/** Replaces the answer's policy by one with a nonce of its own, which it returns. */
export function allowNonce(config: Config, response: Response): string {
  const nonce = newNonce()
  if (config.mode !== 'development') {
    response.setHeader('Content-Security-Policy', contentSecurityPolicy(config, nonce))
  }
  return nonce
}
