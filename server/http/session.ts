import { createHash } from 'node:crypto'
import { type IncomingMessage, ServerResponse } from 'node:http'
import express, {
  type CookieOptions,
  type ErrorRequestHandler,
  type Request,
  type RequestHandler,
  type Response,
} from 'express'
import createStore from 'express-mysql-session'
import session from 'express-session'
import passport from 'passport'
import { Strategy } from 'passport-local'
import { z } from 'zod'
import * as sessions from '#server/services/session.ts'
import { loadViewer, type SessionClaim, type Viewer } from '#server/services/viewer.ts'
import { AppError } from './app-error.ts'
import type { Dependencies, SessionControl } from './context.ts'
import { addressKey, type Limiter } from './rate-limits.ts'

declare global {
  namespace Express {
    /** What a session keeps of a person; everything else is read anew for each request. */
    interface User {
      personId: number
      epoch: number
    }
  }
}

const kept = z.object({ personId: z.number().int(), epoch: z.number().int() })
const keptInSession = z.object({ passport: z.object({ user: kept }) })

export interface SessionGate {
  /** express-session and passport, for the API only. */
  middleware: RequestHandler[]
  loadViewer(request: Request, now: Date): Promise<Viewer>
  controlOf(request: Request, response: Response, now: Date): SessionControl
  /** What the session cookie of an upgrade request claims; compare it by services/viewer.ts. */
  claimOf(request: IncomingMessage): Promise<SessionClaim | null>
  close(): Promise<void>
}

const hashOf = (sessionId: string) => createHash('sha256').update(sessionId).digest('hex')

type Callback = (error?: unknown) => void
const settled = (start: (done: Callback) => void) =>
  new Promise<void>((resolve, reject) => {
    start((error) => (error ? reject(error) : resolve()))
  })

/** Sign-in by passport-local, sessions in MariaDB on the shared pool; a store that fails is an error, never nobody. */
export function createSessionGate(dependencies: Dependencies, limiter: Limiter): SessionGate {
  const { db, config, limits, events } = dependencies
  const Store = createStore(session)
  const store = new Store(
    {
      expiration: limits.session.absolute,
      createDatabaseTable: false,
      clearExpired: true,
      checkExpirationInterval: limits.session.sweep,
      // sign_ins keeps when a session was last seen; the store's row is written once.
      disableTouch: true,
      endConnectionOnClose: false,
    },
    db.$client,
  )
  // Browsers take the prefix only with Secure, and Secure only over https.
  const cookieName = config.secure ? '__Host-brinkbook' : 'brinkbook'
  const cookie: CookieOptions = { httpOnly: true, sameSite: 'lax', secure: config.secure, path: '/' }
  const sessionMiddleware = session({
    store,
    name: cookieName,
    secret: [...config.sessionSecrets],
    resave: false,
    saveUninitialized: false,
    cookie: { httpOnly: true, sameSite: 'lax', secure: config.secure, path: '/' },
  })

  const authenticator = new passport.Passport()
  authenticator.serializeUser((user, done) => done(null, { personId: user.personId, epoch: user.epoch }))
  authenticator.deserializeUser((stored, done) => {
    const user = kept.safeParse(stored)
    done(null, user.success ? user.data : false)
  })
  authenticator.use(
    new Strategy({ usernameField: 'email', passwordField: 'password' }, (email, password, done) => {
      sessions.checkPassword(db, { email, password }).then(
        (found) => done(null, found ?? false),
        (error: unknown) => done(error),
      )
    }),
  )

  const claimIn = (request: Request): SessionClaim | null =>
    request.user ? { ...kept.parse(request.user), sessionHash: hashOf(request.sessionID) } : null

  /** Destroys the store's row and the cookie. */
  async function forget(request: Request, response: Response): Promise<void> {
    await settled((done) => request.logout(done))
    await settled((done) => request.session.destroy(done))
    response.clearCookie(cookieName, cookie)
  }

  async function begin(request: Request, now: Date, user: Express.User): Promise<void> {
    const before = claimIn(request)
    if (before) await endSession(before, now, String(request.id))
    // Regenerates the session's id: one that somebody else planted is worth nothing afterwards.
    await settled((done) => request.logIn(user, done))
    await sessions.begin(db, {
      personId: user.personId,
      sessionHash: hashOf(request.sessionID),
      userAgent: request.get('user-agent') ?? '',
      now,
      requestId: String(request.id),
    })
  }

  async function endSession(claim: SessionClaim, now: Date, requestId: string): Promise<void> {
    await sessions.end(db, { ...claim, now, requestId })
    events.sessionEnded(claim.sessionHash)
  }

  const authenticate = (request: Request, response: Response) =>
    new Promise<Express.User | false>((resolve, reject) => {
      const answer = (error: unknown, user?: Express.User | false | null) =>
        error ? reject(error) : resolve(user || false)
      authenticator.authenticate('local', answer)(request, response, reject)
    })

  async function signIn(request: Request, response: Response, now: Date): Promise<number> {
    const { email } = z.object({ email: z.string() }).parse(request.body)
    const address = addressKey(request)
    limiter.take('signInByAddress', address)
    limiter.take('signInByAccount', email)
    const user = await authenticate(request, response)
    if (!user) throw new AppError('wrong-password', 'E-mail address or password is wrong.')
    limiter.giveBack('signInByAddress', address)
    limiter.giveBack('signInByAccount', email)
    await begin(request, now, user)
    return user.personId
  }

  return {
    middleware: [sessionMiddleware, authenticator.session()],
    async loadViewer(request, now) {
      const claim = claimIn(request)
      const viewer = await loadViewer(db, { claim, now, times: limits.session })
      // Void (ended, idle, of an older epoch): the row goes now, and this request has an empty session to begin in.
      if (claim && !viewer.person) await settled((done) => request.logout(done))
      return viewer
    },
    controlOf: (request, response, now) => ({
      signIn: () => signIn(request, response, now),
      begin: (person) => begin(request, now, { personId: person.id, epoch: person.epoch }),
      async end() {
        const claim = claimIn(request)
        await forget(request, response)
        if (claim) await endSession(claim, now, String(request.id))
      },
    }),
    claimOf: (request) =>
      new Promise((resolve, reject) => {
        // An upgrade comes without express, which the session's middleware is written for. Nothing is answered here.
        const reader = express()
        reader.use(sessionMiddleware, (read) => {
          const found = keptInSession.safeParse(read.session)
          resolve(found.success ? { ...found.data.passport.user, sessionHash: hashOf(read.sessionID) } : null)
        })
        const failed: ErrorRequestHandler = (error, _request, _response, _next) => reject(error)
        reader.use(failed)
        reader(request, new ServerResponse(request))
      }),
    close: () => store.close(),
  }
}
