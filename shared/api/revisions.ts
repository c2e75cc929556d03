import { z } from 'zod'
import { stabilityCard } from '../model/card-document.ts'
import { isoTime, lineOfText, none, ofPage, ofRevision, personName, revisionMark, text } from './common.ts'
import { endpoint } from './endpoint.ts'
import { revisionHead } from './pages.ts'
import { formattedSource } from './sources.ts'

/** One statement of the equation block, ready to show: typeset where it can be, else as typed. */
export const shownLine = z.object({
  line: z.number().int().positive(),
  kind: z.enum(['comment', 'helper', 'equation']),
  tex: z.string().nullable(),
  text: z.string(),
  /** The comment at its end, without the #. */
  comment: z.string().optional(),
})
export type ShownLine = z.infer<typeof shownLine>

export const remark = z.object({
  author: personName,
  at: isoTime,
  text: z.string(),
  line: z.number().int().positive().nullable(),
  symbol: z.string().nullable(),
})
export type Remark = z.infer<typeof remark>

/** A frozen revision in full. `document` is the model document as frozen (shared/model/document.ts). */
export const revision = revisionHead.extend({
  document: z.unknown(),
  stabilityCard: stabilityCard.nullable(),
  lines: z.array(shownLine),
  sources: z.array(formattedSource),
  remarks: z.array(remark),
})
export type Revision = z.infer<typeof revision>

export const listRevisions = endpoint({
  method: 'GET',
  path: '/pages/:code/revisions',
  act: 'revision:list',
  params: ofPage,
  query: none,
  body: none,
  response: z.object({ revisions: z.array(revisionHead) }),
})

/** `with`: the mark of a second revision; its full text comes along and the two are compared (shared/stability/compare.ts). */
export const readRevision = endpoint({
  method: 'GET',
  path: '/pages/:code/revisions/:mark',
  act: 'revision:read',
  params: ofRevision,
  query: z.strictObject({ with: revisionMark.optional() }),
  body: none,
  response: z.object({ revision, other: revision.nullable() }),
})

/**
 * Freezes the draft as the next revision and locks the draft. The server recomputes the card first; a draft that makes
 * no model is refused (422 `model-refused` with the faults). `generation` must be the one the sender saw (412 `changed`).
 */
export const sendForReview = endpoint({
  method: 'POST',
  path: '/pages/:code/revisions',
  act: 'revision:send',
  idempotent: true,
  params: ofPage,
  query: none,
  body: z.strictObject({ summary: lineOfText(500), generation: z.number().int().positive() }),
  response: revisionHead,
})

/** The sender takes it back: state Returned, the draft opens again. */
export const takeBackRevision = endpoint({
  method: 'POST',
  path: '/pages/:code/revisions/:mark/take-back',
  act: 'revision:take-back',
  ifMatch: true,
  status: 200,
  params: ofRevision,
  query: none,
  body: none,
  response: revisionHead,
})

export const returnRevision = endpoint({
  method: 'POST',
  path: '/pages/:code/revisions/:mark/return',
  act: 'revision:return',
  ifMatch: true,
  status: 200,
  params: ofRevision,
  query: none,
  body: z.strictObject({
    remarks: z
      .array(
        z.strictObject({
          text: text(4000).refine((t) => t.length > 0, 'Write a remark'),
          line: z.number().int().positive().optional(),
          symbol: z.string().max(64).optional(),
        }),
      )
      .min(1, 'Say what has to change')
      .max(50),
  }),
  response: revisionHead,
})

/** 403 `may-not` for anyone who wrote in it; 401 `wrong-password` signs nothing; 409 `base-superseded` where another came into force since. */
export const approveRevision = endpoint({
  method: 'POST',
  path: '/pages/:code/revisions/:mark/approve',
  act: 'revision:approve',
  ifMatch: true,
  status: 200,
  params: ofRevision,
  query: none,
  body: z.strictObject({
    password: z.string().min(1, 'Enter your password').max(128),
    equationsRead: z.literal(true),
    verdictRead: z.literal(true),
  }),
  response: revisionHead,
})

/** Nothing is in force afterwards; nothing older comes back. */
export const withdrawRevision = endpoint({
  method: 'POST',
  path: '/pages/:code/revisions/:mark/withdraw',
  act: 'revision:withdraw',
  ifMatch: true,
  status: 200,
  params: ofRevision,
  query: none,
  body: z.strictObject({
    reason: text(1000).refine((t) => t.length >= 3, 'Say why'),
    password: z.string().min(1, 'Enter your password').max(128),
  }),
  response: revisionHead,
})
