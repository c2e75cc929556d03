import { Cite } from '@citation-js/core'
import '@citation-js/plugin-bibtex'
import '@citation-js/plugin-csl'
import { z } from 'zod'
import { citationJob, type ReadCitations } from './citation-job.ts'
import { serveJobs } from './serve-jobs.ts'

const item = z.record(z.string(), z.unknown())

/** The type is always forced: left to guess, the library would fetch a pasted address. */
const cite = (input: unknown, forceType: string) => new Cite(input, { forceType, generateGraph: false })

function readBibtex(text: string): ReadCitations {
  try {
    const items = cite(text, '@bibtex/text').data.map((entry) => item.parse(entry))
    return { ok: true, items }
  } catch (error) {
    return { ok: false, message: bibtexFault(error instanceof Error ? error.message : '') }
  }
}

/** The library says `expected "text", got EOF at line 1 col 21:` and then draws the place. */
function bibtexFault(message: string): string {
  const place = /got (.+) at line (\d+) col (\d+)/.exec(message)
  if (!place) return 'This BibTeX cannot be read.'
  const what =
    place[1] === 'EOF' ? 'it ends too early; is a bracket left open' : `there is something unexpected (${place[1]})`
  return `This BibTeX cannot be read: in line ${place[2]}, column ${place[3]}, ${what}${place[1] === 'EOF' ? '?' : '.'}`
}

function readJson(text: string): ReadCitations {
  let value: unknown
  try {
    value = JSON.parse(text)
  } catch {
    return { ok: false, message: 'This looks like CSL-JSON but is no JSON: a comma, quote or bracket is missing.' }
  }
  const items = z.array(item).safeParse(Array.isArray(value) ? value : [value])
  if (items.success) return { ok: true, items: items.data }
  return { ok: false, message: 'CSL-JSON is one object for each source, or a list of them.' }
}

function formatTogether(items: readonly Record<string, unknown>[]): string[] {
  const numbered = items.map((one, index) => ({ ...one, id: `n${index}` }))
  const entries = cite(numbered, '@csl/list+object').format('bibliography', {
    format: 'text',
    template: 'apa',
    lang: 'en-US',
    asEntryArray: true,
  })
  // A text that begins with "<" is taken for markup and gets an attribute.
  const clean = (text: string) =>
    text
      .replace(/ data-csl-entry-id="n\d+"/, '')
      .replace(/\s+/g, ' ')
      .trim()
  const texts = new Map(entries.map(([id, text]) => [id, clean(text)]))
  return numbered.map(({ id }) => texts.get(id) ?? '')
}

function format(items: readonly Record<string, unknown>[]): string[] {
  try {
    return formatTogether(items)
  } catch {
    // One item the style stumbles over does not take the others with it.
    return items.length === 1 ? [''] : items.flatMap((item) => format([item]))
  }
}

// The first formatting loads the style and takes longest: done before anybody waits for it.
format([{ type: 'book', title: 'First' }])

serveJobs((received) => {
  const job = citationJob.parse(received)
  if (job.kind === 'format') return format(job.items)
  return /^\s*[[{]/.test(job.text) ? readJson(job.text) : readBibtex(job.text)
})
