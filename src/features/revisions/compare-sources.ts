import { z } from 'zod'
import { canonicalJson } from '#shared/model/canonical-json.ts'
import type { CitationReference, ModelDocument } from '#shared/model/document.ts'
import type { Change } from './compare-documents.ts'
import { linesOf } from './compare-lines.ts'

type Item = NonNullable<ModelDocument['citations']>[number]
type LineCitation = NonNullable<ModelDocument['lineCitations']>[number]
type Before = ModelDocument | null

/** What a source is called here: its title, else its id. */
export function titleOf(item: Item): string {
  const title: unknown = item.title
  return typeof title === 'string' && title.trim() !== '' ? title : String(item.id)
}

export type Citer = (reference: CitationReference | LineCitation) => string

/** How a document's citations read: the source's title, the place in it, and what is found there. */
export function citerOf(document: ModelDocument): Citer {
  const titles = new Map((document.citations ?? []).map((item) => [String(item.id), titleOf(item)]))
  return (reference) => {
    if (typeof reference === 'string') return titles.get(reference) ?? reference
    const { id, label, locator, quoted } = reference
    const place = [label, locator].filter(Boolean).join(' ')
    return `${titles.get(id) ?? id}${place ? `, ${place}` : ''}${quoted ? `: “${quoted}”` : ''}`
  }
}

const names = z.array(
  z.object({ family: z.string().optional(), given: z.string().optional(), literal: z.string().optional() }),
)
const date = z.object({ 'date-parts': z.array(z.array(z.union([z.number(), z.string()]))) })

/** A field of a source in words: people as "Family, Given", days as 2026-11-09, others as they are written. */
function fieldText(value: unknown): string | null {
  if (value === undefined || value === null || value === '') return null
  if (typeof value === 'string' || typeof value === 'number') return String(value)
  const people = names.safeParse(value)
  if (people.success) {
    return people.data.map((one) => one.literal ?? [one.family, one.given].filter(Boolean).join(', ')).join('; ')
  }
  const day = date.safeParse(value)
  if (day.success) {
    return day.data['date-parts']
      .map((parts) => parts.map((part) => String(part).padStart(2, '0')).join('-'))
      .join(' to ')
  }
  return JSON.stringify(value)
}

const inFull = (item: Item) =>
  [fieldText(item.author), titleOf(item), fieldText(item['container-title']), fieldText(item.issued)]
    .filter(Boolean)
    .join('. ')

const same = (a: unknown, b: unknown) => canonicalJson(a ?? null) === canonicalJson(b ?? null)

/** Sources that are new, gone or different in any field. */
export function compareSources(before: Before, after: ModelDocument): Change[] {
  const old = new Map((before?.citations ?? []).map((item) => [String(item.id), item]))
  const changes = (after.citations ?? []).flatMap((item): Change[] => {
    const earlier = old.get(String(item.id))
    old.delete(String(item.id))
    const named = { subject: titleOf(item), meaning: '' }
    if (!earlier) return [{ ...named, subject: '', what: '', was: null, now: inFull(item) }]
    return [...new Set([...Object.keys(earlier), ...Object.keys(item)])].flatMap((what) =>
      same(earlier[what], item[what])
        ? []
        : [{ ...named, what, was: fieldText(earlier[what]), now: fieldText(item[what]) }],
    )
  })
  const gone = [...old.values()].map((item) => ({ subject: '', meaning: '', what: '', was: inFull(item), now: null }))
  return [...changes, ...gone]
}

/**
 * What stands behind lines of the equation block. A citation is the same where it stands behind the same text, so that
 * lines that only moved tell nothing.
 */
export function compareLineCitations(before: Before, after: ModelDocument): Change[] {
  const was = before ? citedLines(before) : new Map<string, Told>()
  const now = citedLines(after)
  const change = (told: Told) => ({ subject: `Line ${told.line}`, meaning: told.text, what: '' })
  return [
    ...[...now].filter(([key]) => !was.has(key)).map(([, told]) => ({ ...change(told), was: null, now: told.words })),
    ...[...was].filter(([key]) => !now.has(key)).map(([, told]) => ({ ...change(told), was: told.words, now: null })),
  ]
}

interface Told {
  line: number
  text: string
  words: string
}

function citedLines(document: ModelDocument): Map<string, Told> {
  const lines = linesOf(document.equations)
  const cite = citerOf(document)
  const told = (citation: LineCitation): [string, Told] => {
    const text = (lines[citation.line - 1] ?? '').trim()
    const words = cite(citation)
    return [canonicalJson([text, citation.id, words]), { line: citation.line, text, words }]
  }
  return new Map((document.lineCitations ?? []).map(told))
}
