import { z } from 'zod'
import type { CslItem } from '#server/compute/citations.ts'

export type { CslItem }

/** CSL 1.0.2, appendix III: types of items. */
const types = new Set(
  'article article-journal article-magazine article-newspaper bill book broadcast chapter classic collection dataset document entry entry-dictionary entry-encyclopedia event figure graphic hearing interview legal_case legislation manuscript map motion_picture musical_score pamphlet paper-conference patent performance periodical personal_communication post post-weblog regulation report review review-book software song speech standard thesis treaty webpage'.split(
    ' ',
  ),
)
/** Appendix IV: variables that are text or numbers, as far as a source of a model needs them. */
const textNames =
  'title title-short container-title container-title-short collection-title collection-number publisher publisher-place volume volume-title issue page page-first number number-of-pages number-of-volumes edition version genre event event-title event-place archive archive_location chapter-number section part-number part-title supplement-number language status medium source jurisdiction authority dimensions references scale ISBN ISSN PMID PMCID'.split(
    ' ',
  )
const personNames =
  'author editor translator container-author collection-editor director editorial-director reviewed-author series-creator contributor compiler'.split(
    ' ',
  )
const dateNames = 'issued accessed event-date original-date submitted available-date'.split(' ')

const mostItems = 100
const longestText = 1000
const doiPattern = /^10\.\d{4,9}\/\S{1,180}$/

/** A source as it is stored: only known CSL variables, no markup that means anything, no control characters. */
export interface CleanSource {
  key: string
  csl: CslItem
  doi: string | null
}
export type CleanedSources = { ok: true; sources: CleanSource[] } | { ok: false; message: string; path?: string }

const plain = (text: string) => text.replace(/[\p{Cc}\p{Cs}\s]+/gu, ' ').trim()
const scalar = z.union([z.string(), z.number()]).transform((value) => plain(String(value)))
const part = scalar.optional()
const person = z.object({
  family: part,
  given: part,
  suffix: part,
  literal: part,
  'dropping-particle': part,
  'non-dropping-particle': part,
})
const whole = z.coerce.number().int().min(-9999).max(9999)
const dateParts = z.array(z.array(whole).min(1).max(3)).min(1).max(2)
const date = z.object({ 'date-parts': dateParts.optional(), literal: part, raw: part })

/** What pasted CSL-JSON items come to. Every item needs a title; what CSL does not name is left out. */
export function cleanSources(items: readonly CslItem[]): CleanedSources {
  if (items.length === 0) {
    return {
      ok: false,
      message: 'No source was found in this text. BibTeX entries begin with @, CSL-JSON with [ or {.',
    }
  }
  if (items.length > mostItems) {
    return { ok: false, message: `At most ${mostItems} sources at once; these are ${items.length}.` }
  }
  const sources: CleanSource[] = []
  for (const [index, item] of items.entries()) {
    const cleaned = cleanSource(item)
    const which = items.length === 1 ? 'This source' : `Source ${index + 1}`
    if (!cleaned.ok) return { ok: false, message: `${which} ${cleaned.message}`, path: `sources[${index}]` }
    sources.push(cleaned.source)
  }
  return { ok: true, sources }
}

type Cleaned = { ok: true; source: CleanSource } | { ok: false; message: string }

function cleanSource(item: CslItem): Cleaned {
  const own = (name: string): unknown => (Object.hasOwn(item, name) ? item[name] : undefined)
  const csl: CslItem = {}
  for (const name of textNames) {
    const text = scalar.safeParse(own(name))
    if (!text.success || text.data === '') continue
    if (text.data.length > longestText)
      return { ok: false, message: `has a ${name} of more than ${longestText} characters.` }
    csl[name] = text.data
  }
  if (csl.title === undefined) return { ok: false, message: 'has no title.' }
  for (const name of personNames) {
    const people = z.array(person).max(200).safeParse(own(name))
    const named = people.success ? people.data.flatMap((one) => withoutBlanks(one)) : []
    if (named.length > 0) csl[name] = named
  }
  for (const name of dateNames) {
    const found = date.safeParse(own(name))
    const [known] = found.success ? withoutBlanks(found.data) : []
    if (known) csl[name] = known
  }
  const type = own('type')
  csl.type = typeof type === 'string' && types.has(type) ? type : 'document'
  const url = scalar.safeParse(own('URL'))
  if (url.success && isWebAddress(url.data)) csl.URL = url.data
  const doi = scalar.safeParse(own('DOI'))
  const doiText = doi.success ? doi.data.replace(/^(https?:\/\/(dx\.)?doi\.org\/|doi:\s*)/i, '').toLowerCase() : ''
  if (doiText !== '') {
    if (!doiPattern.test(doiText))
      return { ok: false, message: `has the DOI ${doiText.slice(0, 60)}; one looks like 10.1234/abc.` }
    csl.DOI = doiText
  }
  return {
    ok: true,
    source: { key: keyOf(own('id') ?? own('citation-key'), csl), csl, doi: doiText === '' ? null : doiText },
  }
}

/** One object of what is there, or none. */
function withoutBlanks(value: object): Record<string, unknown>[] {
  const kept = Object.fromEntries(Object.entries(value).filter(([, one]) => one !== undefined && one !== ''))
  return Object.keys(kept).length > 0 ? [kept] : []
}

function isWebAddress(text: string): boolean {
  const url = text.length <= longestText ? URL.parse(text) : null
  return url?.protocol === 'https:' || url?.protocol === 'http:'
}

/** The id by which model documents name the source: the given one where it is short and plain, else name and year. */
function keyOf(given: unknown, csl: CslItem): string {
  const id = typeof given === 'string' || typeof given === 'number' ? String(given).trim() : ''
  if (/^[A-Za-z0-9][\w.:+/-]{0,79}$/.test(id)) return id
  const ascii = (text: string) => text.normalize('NFKD').replace(/[^A-Za-z0-9]/g, '')
  const name = ascii(firstName(csl) ?? titleOf(csl).split(' ')[0] ?? '').toLowerCase()
  return `${name || 'source'}${yearOf(csl) ?? ''}`.slice(0, 80)
}

const namedPeople = z.array(z.object({ family: z.string().optional(), literal: z.string().optional() }))
const familyNames = (csl: CslItem): string[] => {
  const people = namedPeople.safeParse(csl.author ?? csl.editor)
  return people.success ? people.data.flatMap((one) => one.family ?? one.literal ?? []) : []
}
const firstName = (csl: CslItem): string | null => familyNames(csl)[0] ?? null
const textOf = (csl: CslItem, name: string): string | null => {
  const value = csl[name]
  return typeof value === 'string' ? value : null
}

export const titleOf = (csl: CslItem): string => textOf(csl, 'title') ?? ''
export const doiOf = (csl: CslItem): string | null => textOf(csl, 'DOI')
/** A web address, and never any other scheme. */
export function urlOf(csl: CslItem): string | null {
  const url = textOf(csl, 'URL')
  return url !== null && isWebAddress(url) ? url : null
}

const issued = z.object({ 'date-parts': z.array(z.array(z.number())).min(1) })
export function yearOf(csl: CslItem): string | null {
  const found = issued.safeParse(csl.issued)
  const year = found.success ? found.data['date-parts'][0]?.[0] : undefined
  return year === undefined ? null : String(year)
}

/** Authors, year, title and container in one line: to search by, and to show where no formatted line can be had. */
export function plainReference(csl: CslItem): string {
  const parts = [
    familyNames(csl).join(', '),
    yearOf(csl),
    titleOf(csl),
    textOf(csl, 'container-title'),
    textOf(csl, 'publisher'),
  ]
  return parts
    .filter((one) => one)
    .join('. ')
    .slice(0, longestText)
}
