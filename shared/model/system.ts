import { type Assembled, assemble } from './assemble.ts'
import type { CardWarning } from './card-document.ts'
import { type ModelDocument, readRaw, readShape } from './document.ts'
import type { ModelError } from './errors.ts'
import type { ModelSystem } from './expression.ts'
import { isRecord } from './json-guard.ts'
import { sortErrors } from './sort-errors.ts'
import type { Cell, ModelTables } from './tables.ts'

/** The system of a document whose shape is right, or every fault of what it says. */
export type BuiltSystem =
  | { ok: true; system: ModelSystem; warnings: CardWarning[] }
  | { ok: false; errors: ModelError[] }

/** A model that may be computed, or every fault found. Warnings are never refusals. */
export type CheckedModel =
  | { ok: true; document: ModelDocument; system: ModelSystem; warnings: CardWarning[] }
  | { ok: false; errors: ModelError[] }

/**
 * Builds the system of a document: names resolved, ranges checked, equations read, helpers in order of use, units checked.
 * Never throws on a document that `readModelDocument` accepts.
 */
export function buildSystem(document: ModelDocument): BuiltSystem {
  const { system, errors, warnings } = assemble(tablesOf({ ...document }))
  return system && errors.length === 0 ? { ok: true, system, warnings } : { ok: false, errors: sortErrors(errors) }
}

/**
 * The one way in for a model: JSON text or a parsed value, read, parsed, built and checked for units. All faults of
 * shape, tables and equations are told at once; a document with a fault in one table still has its equations judged.
 */
export function checkModel(input: unknown): CheckedModel {
  const raw = readRaw(input)
  if (!raw.ok) return raw
  const shape = readShape(raw.value, raw.errors)
  const shapeErrors = shape.ok ? [] : shape.errors
  // What is over a limit is not walked any further.
  if (shapeErrors.some((error) => error.code === 'too-deep' || error.code === 'too-large'))
    return { ok: false, errors: sortErrors(shapeErrors) }
  const built: Assembled = assemble(tablesOf(raw.value))
  if (shape.ok && built.system && built.errors.length === 0) {
    return { ok: true, document: shape.document, system: built.system, warnings: built.warnings }
  }
  return { ok: false, errors: sortErrors([...shapeErrors, ...built.errors]) }
}

// What can be used of a document whose shape may be wrong. What is wrong or missing there has been told by the schema.
function tablesOf(value: Record<string, unknown>): ModelTables {
  const text = (of: Record<string, unknown>, key: string) => {
    const found = Object.hasOwn(of, key) ? of[key] : undefined
    return typeof found === 'string' ? found : null
  }
  const required = (of: Record<string, unknown>, key: string): Cell => {
    const found = Object.hasOwn(of, key) ? of[key] : undefined
    return typeof found === 'number' && Number.isFinite(found) ? found : 'faulty'
  }
  const optional = (of: Record<string, unknown>, key: string): Cell =>
    of[key] === undefined ? null : required(of, key)
  const rows = (key: string) => {
    const list = Object.hasOwn(value, key) ? value[key] : undefined
    if (!Array.isArray(list)) return null
    return list.map((row: unknown, i) => ({ row: isRecord(row) ? row : {}, path: `${key}[${i}]` }))
  }
  const common = (row: Record<string, unknown>, path: string) => ({
    path,
    symbol: text(row, 'symbol'),
    unit: text(row, 'unit'),
  })
  return {
    equations: text(value, 'equations'),
    parameters:
      rows('parameters')?.map(({ row, path }) => ({
        ...common(row, path),
        value: required(row, 'value'),
        low: optional(row, 'low'),
        high: optional(row, 'high'),
      })) ?? null,
    states:
      rows('states')?.map(({ row, path }) => ({
        ...common(row, path),
        low: required(row, 'low'),
        high: required(row, 'high'),
        start: optional(row, 'start'),
      })) ?? null,
    control: text(value, 'control'),
    secondControl: text(value, 'secondControl'),
    observed: text(value, 'observed'),
    timeUnit: text(value, 'timeUnit'),
  }
}
