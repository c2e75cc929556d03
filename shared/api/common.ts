import { z } from 'zod'

/** No parameters, no query, or no body. Anything sent all the same is refused. */
export const none = z.strictObject({})
/** An empty answer (204). */
export const noContent = z.undefined()

export const id = z.number().int().positive()
export const isoTime = z.iso.datetime()

/** A page's code: 2 to 4 capitals that belong to one group, a hyphen, two digits or more. */
export const pageCode = z.string().regex(/^[A-Z]{2,4}-\d{2,6}$/, 'A page code looks like RD-017')
export const ofPage = z.strictObject({ code: pageCode })

/** A revision's mark, MAJOR.MINOR.PATCH: computed, never typed. */
export const revisionMark = z.string().regex(/^\d{1,6}\.\d{1,6}\.\d{1,6}$/, 'A revision mark looks like 2.1.0')
export const ofRevision = z.strictObject({ code: pageCode, mark: revisionMark })

export const groupSlug = z
  .string()
  .regex(/^[a-z0-9]+(-[a-z0-9]+)*$/)
  .max(60)
export const ofGroup = z.strictObject({ group: groupSlug })

/** A one-time secret in an address (invitation, set-up, new password): 43 characters of base64url. */
export const linkToken = z.string().regex(/^[A-Za-z0-9_-]{43}$/)
export const ofToken = z.strictObject({ token: linkToken })

/** A line of text: trimmed, no control characters. */
export const lineOfText = (max: number) =>
  z
    .string()
    .trim()
    .min(1, 'Must not be empty')
    .max(max)
    .regex(/^[^\p{Cc}\p{Cs}]*$/u, 'Must not hold control characters')
/** Several lines of text: no control characters but line ends and tabs. */
export const text = (max: number) =>
  z
    .string()
    .trim()
    .max(max)
    .regex(/^[^\p{Cs}]*$/u)
    .refine(
      (value) => ![...value].some((c) => c < ' ' && c !== '\n' && c !== '\r' && c !== '\t'),
      'Must not hold control characters',
    )

export const email = z
  .email('This is not an e-mail address')
  .max(254)
  .transform((value) => value.toLowerCase())
/** 15 characters or more, no rule on their kind (no second factor yet). The common list is checked on the server. */
export const newPassword = z.string().min(15, 'At least 15 characters').max(128, 'At most 128 characters')
export const givenPassword = z.string().min(1, 'Enter your password').max(128)

/** A person as others see them. */
export const personName = z.object({ id, name: z.string() })
export type PersonName = z.infer<typeof personName>
