import { z } from 'zod'
import { verdicts } from '../model/card-document.ts'
import {
  groupSlug,
  id,
  isoTime,
  lineOfText,
  noContent,
  none,
  ofPage,
  pageCode,
  personName,
  revisionMark,
  text,
} from './common.ts'
import { endpoint } from './endpoint.ts'
import { pageStates, readAccess } from './roles.ts'

/** Kinds a page can be looked for by: of the onset that ends the steady running nearest to the running point. */
export const onsetKinds = ['hard', 'soft', 'undecided', 'none'] as const
export type OnsetKind = (typeof onsetKinds)[number]

/** States of a revision, and of a row's best one. A draft is not a revision; a row that has only a draft says so. */
export const revisionStates = ['in-review', 'returned', 'in-force', 'superseded', 'withdrawn'] as const
export type RevisionState = (typeof revisionStates)[number]
export const rowStates = ['draft', ...revisionStates] as const
export type RowState = (typeof rowStates)[number]

/**
 * What a list row and its edge strip need of a card, in the model's own units (shared/stability/summary.ts).
 * `ground` are the stretches of the control range where the window's branch (or, without a window, the first branch) is stable.
 */
export const cardSummary = z.object({
  control: z.object({
    symbol: z.string(),
    meaning: z.string(),
    unit: z.string(),
    low: z.number(),
    high: z.number(),
    value: z.number(),
  }),
  observed: z.object({ symbol: z.string(), meaning: z.string(), unit: z.string() }),
  timeUnit: z.string(),
  kind: z.enum(onsetKinds),
  ground: z.array(z.object({ from: z.number(), to: z.number() })),
  onsets: z.array(
    z.object({
      p: z.number(),
      omega: z.number(),
      verdict: z.enum(verdicts),
      operating: z.boolean(),
      /** +1: stability is lost as the control rises through p. */ direction: z.union([z.literal(1), z.literal(-1)]),
    }),
  ),
  /** Position in `onsets` of the one the row speaks of; null where kind is none. */
  main: z.number().int().nonnegative().nullable(),
  /** Other limits of steady running (turning points, branch points), where they end the window. */
  otherEnds: z.array(z.object({ p: z.number(), kind: z.enum(['fold', 'branch-point', 'box-left']) })),
})
export type CardSummary = z.infer<typeof cardSummary>

export const pageRow = z.object({
  code: pageCode,
  title: z.string(),
  summary: z.string(),
  field: z.string(),
  group: z.object({ slug: z.string(), name: z.string() }),
  state: z.enum(rowStates),
  mark: revisionMark.nullable(),
  changedAt: isoTime,
  /** Of the revision in force where there is one, else of the draft (members only), else null. */
  card: cardSummary.nullable(),
  /** The draft's kind where it differs from the revision in force; members only. */
  draftKind: z.enum(onsetKinds).nullable(),
})
export type PageRow = z.infer<typeof pageRow>

const facet = z.array(z.object({ value: z.string(), label: z.string(), count: z.number().int() }))

/** `q` looks in code, title, symbols, parameter meanings and sources. Facets may be given several times (`onset=hard&onset=soft`). */
export const listPages = endpoint({
  method: 'GET',
  path: '/pages',
  act: 'library:list',
  params: none,
  body: none,
  query: z.strictObject({
    q: z.string().max(200).optional(),
    onset: z.preprocess(
      (v) => (v === undefined || Array.isArray(v) ? v : [v]),
      z.array(z.enum(onsetKinds)).max(8).optional(),
    ),
    state: z.preprocess(
      (v) => (v === undefined || Array.isArray(v) ? v : [v]),
      z.array(z.enum(rowStates)).max(8).optional(),
    ),
    group: z.preprocess((v) => (v === undefined || Array.isArray(v) ? v : [v]), z.array(groupSlug).max(50).optional()),
    sort: z.enum(['changed', 'code', 'title']).default('changed'),
    cursor: z.string().max(200).optional(),
    limit: z.coerce.number().int().min(1).max(100).default(50),
  }),
  response: z.object({
    pages: z.array(pageRow),
    total: z.number().int(),
    next: z.string().nullable(),
    facets: z.object({ onset: facet, state: facet, group: facet }),
  }),
})

/** `document`: a model document to begin with (import); without it the page begins with a small commented example of its own. */
export const createPage = endpoint({
  method: 'POST',
  path: '/groups/:group/pages',
  act: 'page:create',
  idempotent: true,
  params: z.strictObject({ group: groupSlug }),
  query: none,
  body: z.strictObject({
    prefix: z.string().regex(/^[A-Z]{2,4}$/),
    title: lineOfText(120),
    summary: text(400).optional(),
    field: text(60).optional(),
    document: z.unknown().optional(),
  }),
  response: z.object({ code: pageCode }),
})

const signature = z.object({
  person: personName,
  meaning: z.enum(['written', 'checked', 'approved', 'withdrawn']),
  at: isoTime,
})
export type Signature = z.infer<typeof signature>

export const revisionHead = z.object({
  mark: revisionMark,
  state: z.enum(revisionStates),
  summary: z.string(),
  sentBy: personName,
  sentAt: isoTime,
  settledAt: isoTime.nullable(),
  /** Reason of a withdrawal, else null. */
  reason: z.string().nullable(),
  base: revisionMark.nullable(),
  signatures: z.array(signature),
  engine: z.string(),
  fingerprint: z.string(),
  card: cardSummary.nullable(),
  etag: z.string(),
})
export type RevisionHead = z.infer<typeof revisionHead>

/** The head of a page: its title block, and what the viewer may do there (names of acts in roles.ts). */
export const page = z.object({
  id,
  code: pageCode,
  title: z.string(),
  summary: z.string(),
  field: z.string(),
  group: z.object({ slug: z.string(), name: z.string() }),
  access: z.enum(readAccess),
  state: z.enum(pageStates),
  role: z.string(),
  may: z.array(z.string()),
  inForce: revisionHead.nullable(),
  /** Newest superseded or withdrawn revision where nothing is in force. */
  lastPublic: revisionHead.nullable(),
  /** Members only. */
  inReview: revisionHead.nullable(),
  draft: z
    .object({
      generation: z.number().int(),
      writers: z.array(personName),
      changedAt: isoTime,
      kind: z.enum(onsetKinds).nullable(),
      differs: z.boolean(),
    })
    .nullable(),
  counts: z.object({ sources: z.number().int(), revisions: z.number().int() }),
  etag: z.string(),
})
export type Page = z.infer<typeof page>

export const readPage = endpoint({
  method: 'GET',
  path: '/pages/:code',
  act: 'page:read',
  params: ofPage,
  query: none,
  body: none,
  response: page,
})

export const changePage = endpoint({
  method: 'PATCH',
  path: '/pages/:code',
  act: 'page:settings',
  ifMatch: true,
  params: ofPage,
  query: none,
  body: z.strictObject({ access: z.enum(readAccess) }),
  response: page,
})

/** Only a page that never had a revision sent; it is hidden, its code stays used. */
export const removePage = endpoint({
  method: 'DELETE',
  path: '/pages/:code',
  act: 'page:remove',
  ifMatch: true,
  params: ofPage,
  query: none,
  body: none,
  response: noContent,
})
