import type { Compute } from '#server/compute/compute.ts'
import { AppError } from '#server/http/app-error.ts'
import { type CleanSource, cleanSources } from './csl.ts'

/** A source typed field by field. */
export interface TypedSource {
  type: string
  title: string
  authors: readonly { family: string; given?: string }[]
  year?: string
  container?: string
  publisher?: string
  volume?: string
  issue?: string
  pages?: string
  doi?: string
  url?: string
}

export function fromForm(form: TypedSource): CleanSource[] {
  const { type, title, authors, year, container, publisher, volume, issue, pages, doi, url } = form
  const cleaned = cleanSources([
    {
      type,
      title,
      author: authors.map(({ family, given }) => ({ family, given })),
      ...(year ? { issued: { 'date-parts': [[Number(year)]] } } : {}),
      'container-title': container,
      publisher,
      volume,
      issue,
      page: pages,
      DOI: doi,
      URL: url,
    },
  ])
  if (!cleaned.ok) throw new AppError('source-refused', cleaned.message)
  return cleaned.sources
}

/** Sources in pasted BibTeX or CSL-JSON. @throws {AppError} `source-refused` saying what is wrong, `not-ready`. */
export async function fromPasted(compute: Compute, text: string): Promise<CleanSource[]> {
  const outcome = await compute.citations.read(text)
  if (!outcome.ok) {
    if (outcome.reason === 'deadline' || outcome.reason === 'crashed') {
      throw new AppError('source-refused', 'This text could not be read in the time that one paste gets.')
    }
    throw new AppError('not-ready', 'Sources cannot be read at this moment. Try again.', { retryAfter: 5 })
  }
  if (!outcome.read.ok) throw new AppError('source-refused', outcome.read.message)
  const cleaned = cleanSources(outcome.read.items)
  if (cleaned.ok) return cleaned.sources
  const { message, path } = cleaned
  throw new AppError('source-refused', message, { errors: [{ code: 'source-refused', message, path }] })
}
