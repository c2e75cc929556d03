import { z } from 'zod'
import { linkLabels } from '../model/locators.ts'
import { id, lineOfText, noContent, none, ofPage, pageCode, text } from './common.ts'
import { endpoint } from './endpoint.ts'

export const sourceTarget = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('page') }),
  z.strictObject({ kind: z.literal('parameter'), symbol: lineOfText(64) }),
  /** `anchor`: the line's start as a Yjs relative position (base64), so that the link follows its line in the draft. */
  z.strictObject({
    kind: z.literal('line'),
    line: z.number().int().positive(),
    anchor: z.string().max(200).optional(),
  }),
])
export type SourceTarget = z.infer<typeof sourceTarget>

export const sourceLink = z.object({
  id,
  target: sourceTarget,
  label: z.enum(linkLabels).nullable(),
  locator: z.string().nullable(),
  quoted: z.string().nullable(),
})
export type SourceLink = z.infer<typeof sourceLink>

/** A source as listed: `formatted` is one line of text from citation-js, never HTML. `key` is its id in model documents. */
export const formattedSource = z.object({
  id,
  key: z.string(),
  formatted: z.string(),
  title: z.string(),
  year: z.string().nullable(),
  url: z.string().nullable(),
  doi: z.string().nullable(),
  csl: z.record(z.string(), z.unknown()),
  links: z.array(sourceLink),
})
export type FormattedSource = z.infer<typeof formattedSource>

/** The sources attached to the draft (members). A revision carries its own frozen ones. */
export const listSources = endpoint({
  method: 'GET',
  path: '/pages/:code/sources',
  act: 'source:list',
  params: ofPage,
  query: none,
  body: none,
  response: z.object({ sources: z.array(formattedSource) }),
})

/** Attached to the page at once. `pasted` is BibTeX or CSL-JSON (one or more entries), `form` a source typed field by field. */
export const addSources = endpoint({
  method: 'POST',
  path: '/pages/:code/sources',
  act: 'source:write',
  idempotent: true,
  params: ofPage,
  query: none,
  body: z.discriminatedUnion('from', [
    z.strictObject({
      from: z.literal('pasted'),
      pasted: z
        .string()
        .min(1, 'Paste BibTeX or CSL-JSON')
        .max(64 * 1024),
    }),
    z.strictObject({
      from: z.literal('form'),
      type: z.enum([
        'article-journal',
        'book',
        'chapter',
        'paper-conference',
        'report',
        'standard',
        'thesis',
        'dataset',
        'webpage',
        'document',
      ]),
      title: lineOfText(400),
      authors: z.array(z.strictObject({ family: lineOfText(80), given: text(80).optional() })).max(50),
      year: z
        .string()
        .regex(/^-?\d{1,4}$/, 'A year in figures')
        .optional(),
      container: text(200).optional(),
      publisher: text(200).optional(),
      volume: text(40).optional(),
      issue: text(40).optional(),
      pages: text(40).optional(),
      doi: z
        .string()
        .trim()
        .regex(/^10\.\d{4,9}\/\S+$/, 'A DOI looks like 10.1234/abc')
        .max(200)
        .optional(),
      url: z
        .url({ protocol: /^https?$/ })
        .max(500)
        .optional(),
    }),
  ]),
  response: z.object({ sources: z.array(formattedSource) }),
})

export const removeSource = endpoint({
  method: 'DELETE',
  path: '/pages/:code/sources/:source',
  act: 'source:write',
  params: z.strictObject({ code: pageCode, source: z.coerce.number().int().positive() }),
  query: none,
  body: none,
  response: noContent,
})

export const linkSource = endpoint({
  method: 'POST',
  path: '/pages/:code/sources/:source/links',
  act: 'source:write',
  idempotent: true,
  params: z.strictObject({ code: pageCode, source: z.coerce.number().int().positive() }),
  query: none,
  body: z.strictObject({
    target: sourceTarget,
    label: z.enum(linkLabels).optional(),
    locator: text(60).optional(),
    quoted: text(200).optional(),
  }),
  response: z.object({ sources: z.array(formattedSource) }),
})

export const unlinkSource = endpoint({
  method: 'DELETE',
  path: '/pages/:code/source-links/:link',
  act: 'source:write',
  params: z.strictObject({ code: pageCode, link: z.coerce.number().int().positive() }),
  query: none,
  body: none,
  response: noContent,
})
