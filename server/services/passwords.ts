import { hash, verify } from '@node-rs/argon2'
import { AppError } from '#server/http/app-error.ts'
import { limits } from '#server/limits.ts'
import { isCommonPassword } from './common-passwords.ts'

const { memory, passes, lanes, atOnce, waiting } = limits.password
const options = { memoryCost: memory, timeCost: passes, parallelism: lanes }
// argon2id is the library's default; its text form names the parameters it was made with.
const current = `$argon2id$v=19$m=${memory},t=${passes},p=${lanes}$`

let running = 0
const queue: (() => void)[] = []

/** Hashing takes memory and a core: at most two at once, and not an endless line of them. */
async function inTurn<T>(work: () => Promise<T>): Promise<T> {
  if (running >= atOnce) {
    if (queue.length >= waiting) {
      throw new AppError('not-ready', 'Too many people are signing in at this moment. Try again.', { retryAfter: 5 })
    }
    await new Promise<void>((resolve) => queue.push(resolve))
  } else {
    running++
  }
  try {
    return await work()
  } finally {
    const next = queue.shift()
    if (next) next()
    else running--
  }
}

/** The text to store for a password. */
export const hashPassword = (password: string): Promise<string> => inTurn(() => hash(password, options))

// Verified in place of a hash that does not exist, so that an unknown address takes as long to refuse as a wrong password.
let stand: Promise<string> | undefined

/** Whether the password is the stored one. A missing hash is refused after the same work. */
export async function passwordMatches(stored: string | null, password: string): Promise<boolean> {
  stand ??= hashPassword('no account has this password')
  const against = stored ?? (await stand)
  const matches = await inTurn(() => verify(against, password))
  return stored !== null && matches
}

/** True where a stored hash was made with other parameters than today's. */
export const needsRehash = (stored: string): boolean => !stored.startsWith(current)

/**
 * Refuses a new password that is among the first ones anybody would try: on the list of common ones, made of one or two
 * repeated pieces, or not much more than the person's own name, address or this product's name.
 *
 * @throws {AppError} `bad-request`, with the fault on the field `field`.
 */
export function checkNewPassword(password: string, about: { name: string; email: string }, field: string): void {
  if (!isCommonPassword(password, [about.name, about.email])) return
  throw new AppError('bad-request', 'This password is too easy to guess.', {
    errors: [
      {
        code: 'common-password',
        message: 'Too easy to guess: choose several words that are not usual together.',
        path: field,
      },
    ],
  })
}
