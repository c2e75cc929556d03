import type { z } from 'zod'
import type { ModelError } from './errors.ts'
import { isRecord, pathText } from './json-guard.ts'
import { mostErrors } from './sort-errors.ts'

type Issue = z.core.$ZodIssue

/** The value at a path of a parsed document, own members only. */
function valueAt(root: unknown, path: readonly PropertyKey[]): unknown {
  let at = root
  for (const step of path) {
    if (typeof at !== 'object' || at === null || !Object.hasOwn(at, step)) return undefined
    at = Reflect.get(at, step)
  }
  return at
}

const kindOf = (value: unknown) => {
  if (value === null) return 'null'
  if (Array.isArray(value)) return 'a list'
  if (typeof value === 'string') return 'text'
  if (typeof value === 'number') return 'a number'
  return typeof value === 'boolean' ? 'true or false' : 'an object'
}
const wanted: Record<string, string> = {
  string: 'text',
  number: 'a number',
  int: 'a whole number',
  array: 'a list',
  object: 'an object',
}

/** What a schema found wrong, in the codes and words of the format, each with its path. */
export function issuesToErrors(issues: readonly Issue[], root: unknown): ModelError[] {
  return issues.slice(0, mostErrors).flatMap((issue) => oneIssue(issue, issue.path, root))
}

function oneIssue(issue: Issue, path: readonly PropertyKey[], root: unknown): ModelError[] {
  const where = pathText(path)
  const value = valueAt(root, path)
  const last = path.at(-1)
  const name = typeof last === 'string' ? last : where
  if (issue.code === 'unrecognized_keys') {
    return issue.keys.map((key) => {
      const inner = pathText([...path, key])
      return { code: 'unknown-field', message: `The field ${inner} is not known in this format.`, path: inner }
    })
  }
  if (value === undefined) return [{ code: 'missing-field', message: `The field ${where} is missing.`, path: where }]
  if (typeof value === 'number' && !Number.isFinite(value)) {
    return [{ code: 'not-finite', message: 'This number is too large to be read.', path: where }]
  }
  switch (issue.code) {
    case 'invalid_type':
      return [
        {
          code: 'wrong-type',
          message: `${name} has to be ${wanted[issue.expected] ?? issue.expected}, not ${kindOf(value)}.`,
          path: where,
        },
      ]
    case 'invalid_value':
      return [
        {
          code: 'wrong-type',
          message: `${name} has to be one of ${issue.values.map(String).join(', ')}.`,
          path: where,
        },
      ]
    case 'too_small':
      return [
        {
          code: 'bad-range',
          message: `${name} may not be ${issue.inclusive ? 'less than' : 'less than or equal to'} ${issue.minimum}.`,
          path: where,
        },
      ]
    case 'invalid_union': {
      // A citation is an id or an object; an object is judged as one.
      const asObject = isRecord(value) ? issue.errors.at(-1) : undefined
      if (asObject) return asObject.flatMap((one) => oneIssue(one, [...path, ...one.path], root))
      const message =
        issue.errors.length === 0
          ? `${name} is of no kind that is known here.`
          : `${name} has to be an id, not ${kindOf(value)}.`
      return [{ code: 'wrong-type', message, path: where }]
    }
    default:
      return [{ code: 'wrong-type', message: `${name} cannot be read.`, path: where }]
  }
}
