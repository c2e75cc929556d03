import { createCipheriv, createDecipheriv, createHash, hkdfSync, randomBytes } from 'node:crypto'
import { z } from 'zod'
import { type Database, isDuplicate } from '#drizzle/client.ts'
import * as queries from '#server/queries/idempotency.ts'
import { AppError } from './app-error.ts'

export interface Answer {
  status: number
  body: unknown
  etag: string | null
}

const sealed = z.object({ iv: z.string(), tag: z.string(), data: z.string() })
const storedAnswer = z.object({ body: z.unknown(), etag: z.string().nullable() })

const sha256 = (text: string) => createHash('sha256').update(text).digest('hex')
const keyOf = (secret: string) => Buffer.from(hkdfSync('sha256', secret, '', 'kept answer', 32))

/*
 * Answers may carry one-time links, whose secrets the database never holds in the clear. So a kept answer is sealed with
 * a key made from the Idempotency-Key itself, of which only the hash is stored: only who sent it can have it again.
 */
function seal(secret: string, value: unknown): z.infer<typeof sealed> {
  const iv = randomBytes(12)
  const cipher = createCipheriv('aes-256-gcm', keyOf(secret), iv)
  const data = Buffer.concat([cipher.update(JSON.stringify(value), 'utf8'), cipher.final()])
  return { iv: iv.toString('base64'), tag: cipher.getAuthTag().toString('base64'), data: data.toString('base64') }
}

function unseal(secret: string, value: unknown): unknown {
  const { iv, tag, data } = sealed.parse(value)
  const decipher = createDecipheriv('aes-256-gcm', keyOf(secret), Buffer.from(iv, 'base64'))
  decipher.setAuthTag(Buffer.from(tag, 'base64'))
  return JSON.parse(Buffer.concat([decipher.update(Buffer.from(data, 'base64')), decipher.final()]).toString('utf8'))
}

/** The answer once given to this very request of the person, or null. */
export async function keptAnswer(
  db: Database,
  input: { personId: number; key: string; request: string },
): Promise<Answer | null> {
  const kept = await queries.find(db, input.personId, sha256(input.key))
  if (kept?.requestHash !== sha256(input.request) || kept.status === null) return null
  return { status: kept.status, ...storedAnswer.parse(unseal(input.key, kept.answer)) }
}

/**
 * Runs a request that makes something, at most once for each Idempotency-Key of a person: a repetition gets the first
 * answer again. A refused request may be tried again with the same key. A key whose first request never came to an end
 * (the process died) stays refused: whether the thing was made is then for the sender to look up.
 *
 * @throws {AppError} `bad-request` for a key of the wrong form, `same-key` where it belongs to another request or one
 *                    still running.
 */
export async function once(
  db: Database,
  input: { personId: number; key: string; request: string; now: Date; keep: number },
  run: () => Promise<Answer>,
): Promise<Answer> {
  if (!/^[\x21-\x7e]{16,100}$/.test(input.key)) {
    throw new AppError('bad-request', 'The Idempotency-Key must be 16 to 100 printable characters.')
  }
  const { personId, now } = input
  const key = sha256(input.key)
  const requestHash = sha256(input.request)
  await queries.removeBefore(db, personId, new Date(now.getTime() - input.keep))
  try {
    await queries.insert(db, { personId, key, requestHash, createdAt: now })
  } catch (error) {
    if (!isDuplicate(error)) throw error
    const kept = await queries.find(db, personId, key)
    if (kept?.requestHash !== requestHash) {
      throw new AppError('same-key', 'This Idempotency-Key was used for another request.')
    }
    if (kept.status === null)
      throw new AppError('same-key', 'The first request with this Idempotency-Key has not ended.')
    return { status: kept.status, ...storedAnswer.parse(unseal(input.key, kept.answer)) }
  }
  let answer: Answer
  try {
    answer = await run()
  } catch (error) {
    await queries.remove(db, personId, key)
    throw error
  }
  const { status, body, etag } = answer
  await queries.finish(db, personId, key, { status, answer: seal(input.key, { body, etag }) })
  return answer
}
