import { z } from 'zod'
import { issuesToErrors } from './document-issues.ts'
import type { ModelError } from './errors.ts'
import { guardValue, isRecord, parseJson } from './json-guard.ts'
import { locatorLabels } from './locators.ts'
import { rowsFault } from './tables.ts'

/**
 * The model document ("brinkbook-model", version 1): what is imported, exported, frozen in a revision and handed to the
 * command line. Numbers are in the model's own units. This is the shape alone; what the words in it mean to each other
 * is checked by `checkModel` (system.ts).
 */
const finite = z.number()

const located = {
  id: z.string(),
  label: z.enum(locatorLabels).optional(),
  locator: z.string().optional(),
  quoted: z.string().optional(),
}

/** A citation of one number: the id alone, or with the place in the source and the text found there. */
export const citationReference = z.union([z.string(), z.strictObject(located)])
/** A citation of a line of the equation block (physical line, from 1). */
export const lineCitation = z.strictObject({ line: z.number().int().positive(), ...located })

/** How uncertain a parameter is, in its own unit. */
export const uncertainty = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('normal'), sd: finite.nonnegative() }),
  z.strictObject({ kind: z.literal('uniform'), low: finite, high: finite }),
])

export const documentParameter = z.strictObject({
  symbol: z.string(),
  value: finite,
  low: finite.optional(),
  high: finite.optional(),
  unit: z.string().optional(),
  meaning: z.string().optional(),
  uncertainty: uncertainty.optional(),
  citations: z.array(citationReference).optional(),
})

export const documentState = z.strictObject({
  symbol: z.string(),
  low: finite,
  high: finite,
  start: finite.optional(),
  unit: z.string().optional(),
  meaning: z.string().optional(),
  citations: z.array(citationReference).optional(),
})

export const modelDocument = z.strictObject({
  format: z.literal('brinkbook-model'),
  version: z.literal(1),
  title: z.string(),
  summary: z.string().optional(),
  field: z.string().optional(),
  timeUnit: z.string().optional(),
  equations: z.string(),
  parameters: z.array(documentParameter),
  states: z.array(documentState),
  control: z.string(),
  secondControl: z.string().optional(),
  observed: z.string(),
  /** CSL-JSON items. Their inner fields pass through. */
  citations: z.array(z.looseObject({ id: z.union([z.string(), finite]) })).optional(),
  lineCitations: z.array(lineCitation).optional(),
  notes: z.string().optional(),
  quietWord: z.string().optional(),
  leftOut: z.array(z.string()).optional(),
})

export type ModelDocument = z.infer<typeof modelDocument>
export type DocumentParameter = z.infer<typeof documentParameter>
export type DocumentState = z.infer<typeof documentState>
export type CitationReference = z.infer<typeof citationReference>
export type Uncertainty = z.infer<typeof uncertainty>

/** A document, or every fault of its shape. */
export type ReadDocument = { ok: true; document: ModelDocument } | { ok: false; errors: ModelError[] }

/** The value a text or an object holds before its shape is judged: the way in for `checkModel`. */
export type RawDocument =
  | { ok: true; value: Record<string, unknown>; errors: ModelError[] }
  | { ok: false; errors: ModelError[] }

/** Reads text (JSON) or a value that was parsed already, as far as an object of this format. Never throws. */
export function readRaw(input: unknown): RawDocument {
  const json = typeof input === 'string' ? parseJson(input) : { ok: true as const, value: input }
  if (!json.ok) return { ok: false, errors: [json.error] }
  const { value } = json
  if (!isRecord(value)) {
    return {
      ok: false,
      errors: [
        {
          code: 'wrong-format',
          message: 'A model document is a JSON object with the field "format": "brinkbook-model".',
        },
      ],
    }
  }
  const errors: ModelError[] = []
  if (value.format !== undefined && value.format !== 'brinkbook-model') {
    errors.push({
      code: 'wrong-format',
      message: 'This is not a model document: its format is not "brinkbook-model".',
      path: 'format',
    })
  } else if (value.version !== undefined && value.version !== 1) {
    errors.push({
      code: 'wrong-format',
      message: 'This version of the format is not known here. Version 1 is.',
      path: 'version',
    })
  }
  if (errors.length > 0) return { ok: false, errors }
  return { ok: true, value, errors: guardValue(value) }
}

/**
 * Reads a model document from JSON text, or from a value that was parsed already, and collects every fault of its shape
 * with its path. Safe for any input: size, nesting, __proto__ members and numbers beyond the doubles are refused.
 */
export function readModelDocument(input: unknown): ReadDocument {
  const raw = readRaw(input)
  return raw.ok ? readShape(raw.value, raw.errors) : raw
}

/** The shape of a document that `readRaw` let pass, with the faults found there. */
export function readShape(value: Record<string, unknown>, guarded: readonly ModelError[]): ReadDocument {
  // A value that nests without end or holds __proto__ never reaches the schema.
  if (guarded.some((error) => error.code === 'too-deep' || error.code === 'unknown-field'))
    return { ok: false, errors: [...guarded] }
  // Nor does a table that is too long: a schema would tell every row of it.
  const large = (['parameters', 'states'] as const)
    .map((path) => (Array.isArray(value[path]) ? rowsFault(value[path].length, path) : null))
    .filter((fault) => fault !== null)
  if (large.length > 0) return { ok: false, errors: [...guarded, ...large] }
  const parsed = modelDocument.safeParse(value)
  if (!parsed.success) {
    const told = new Set(guarded.map((error) => error.path))
    const errors = issuesToErrors(parsed.error.issues, value).filter((error) => !told.has(error.path))
    return { ok: false, errors: [...guarded, ...errors] }
  }
  const errors = [...guarded, ...uncertaintyFaults(parsed.data), ...citationFaults(parsed.data)]
  return errors.length > 0 ? { ok: false, errors } : { ok: true, document: parsed.data }
}

function uncertaintyFaults(document: ModelDocument): ModelError[] {
  const errors: ModelError[] = []
  document.parameters.forEach((parameter, i) => {
    const range = parameter.uncertainty
    if (range?.kind !== 'uniform' || range.low <= range.high) return
    const message = `The uncertainty of ${parameter.symbol} has its low end (${range.low}) above its high end (${range.high}).`
    errors.push({ code: 'bad-range', message, path: `parameters[${i}].uncertainty.low` })
  })
  return errors
}

function citationFaults(document: ModelDocument): ModelError[] {
  const ids = new Set((document.citations ?? []).map((item) => String(item.id)))
  const errors: ModelError[] = []
  const check = (id: string, path: string) => {
    if (ids.has(id)) return
    errors.push({
      code: 'unknown-citation',
      message: `There is no citation with the id ${JSON.stringify(id.slice(0, 60))}.`,
      path,
    })
  }
  const rows = (name: 'parameters' | 'states') =>
    document[name].forEach((row, i) => {
      row.citations?.forEach((citation, j) => {
        const path = `${name}[${i}].citations[${j}]`
        if (typeof citation === 'string') check(citation, path)
        else check(citation.id, `${path}.id`)
      })
    })
  rows('parameters')
  rows('states')
  document.lineCitations?.forEach((citation, i) => {
    check(citation.id, `lineCitations[${i}].id`)
  })
  return errors
}
