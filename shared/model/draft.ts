import { assemble } from './assemble.ts'
import type { ModelDocument, Uncertainty } from './document.ts'
import { readDraft } from './draft-cells.ts'
import type { ModelError } from './errors.ts'
import { sortErrors } from './sort-errors.ts'
import type { CheckedModel } from './system.ts'

/**
 * The model while people are typing it: tables whose cells are strings, so that a half-typed "1e" survives. A row whose
 * cells are all blank is not there yet. Paths of errors count the draft's own rows.
 */
export interface DraftParameter {
  id: string
  symbol: string
  value: string
  low: string
  high: string
  unit: string
  meaning: string
  /** "normal 0.02" (standard deviation) or "uniform 0.5 to 2"; blank where nothing is known. */
  uncertainty?: string
}
export interface DraftState {
  id: string
  symbol: string
  low: string
  high: string
  start: string
  unit: string
  meaning: string
}
/** `settings` holds title, summary, field, timeUnit, control, secondControl, observed, quietWord, leftOut (one a line), notes. */
export interface DraftContent {
  equations: string
  parameters: DraftParameter[]
  states: DraftState[]
  settings: Record<string, string>
}

/** The document a draft spells, or every cell that cannot be read. What the words mean to each other is not judged. */
export function documentFromDraft(
  draft: DraftContent,
): { ok: true; document: ModelDocument } | { ok: false; errors: ModelError[] } {
  const { document, errors } = readDraft(draft)
  return errors.length > 0 ? { ok: false, errors: sortErrors(errors) } : { ok: true, document }
}

/** `checkModel` for a draft: cells, tables, equations and units judged together, all faults at once. Never throws. */
export function checkDraft(draft: DraftContent): CheckedModel {
  const { document, tables, errors } = readDraft(draft)
  const built = assemble(tables)
  if (errors.length === 0 && built.system && built.errors.length === 0) {
    return { ok: true, document, system: built.system, warnings: built.warnings }
  }
  return { ok: false, errors: sortErrors([...errors, ...built.errors]) }
}

/** The draft that spells a document: what a new draft begins from. Citations stay with the page, not in the draft. */
export function draftFromDocument(document: ModelDocument): DraftContent {
  const number = (value: number | undefined) => (value === undefined ? '' : String(value))
  return {
    equations: document.equations,
    parameters: document.parameters.map((row, i) => ({
      id: `p${i + 1}`,
      symbol: row.symbol,
      value: number(row.value),
      low: number(row.low),
      high: number(row.high),
      unit: row.unit ?? '',
      meaning: row.meaning ?? '',
      uncertainty: row.uncertainty ? uncertaintyText(row.uncertainty) : '',
    })),
    states: document.states.map((row, i) => ({
      id: `s${i + 1}`,
      symbol: row.symbol,
      low: number(row.low),
      high: number(row.high),
      start: number(row.start),
      unit: row.unit ?? '',
      meaning: row.meaning ?? '',
    })),
    settings: {
      title: document.title,
      summary: document.summary ?? '',
      field: document.field ?? '',
      timeUnit: document.timeUnit ?? '',
      control: document.control,
      secondControl: document.secondControl ?? '',
      observed: document.observed,
      quietWord: document.quietWord ?? '',
      leftOut: (document.leftOut ?? []).join('\n'),
      notes: document.notes ?? '',
    },
  }
}

/** An uncertainty as its cell spells it. */
export function uncertaintyText(uncertainty: Uncertainty): string {
  if (uncertainty.kind === 'normal') return `normal ${uncertainty.sd}`
  return `uniform ${uncertainty.low} to ${uncertainty.high}`
}
