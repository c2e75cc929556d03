import type { ModelError } from './errors.ts'

/** Deepest nesting of a document. A model has 5; citations carry some of their own. */
export const deepestDocument = 64
/** Longest document text in UTF-16 units (1 MiB). */
export const longestDocument = 1_048_576

/** Path of a member inside a document: parameters[0].value; unusual names are quoted. */
export function pathText(path: readonly PropertyKey[]): string {
  let text = ''
  for (const step of path) {
    if (typeof step === 'number') text += `[${step}]`
    else {
      const name = String(step)
      const plain = /^[A-Za-z_][A-Za-z0-9_]{0,63}$/.test(name)
      text += plain
        ? `${text ? '.' : ''}${name}`
        : `[${JSON.stringify(name.length > 40 ? `${name.slice(0, 40)}…` : name)}]`
    }
  }
  return text
}

/** True for an object that is neither null nor an array. */
export function isRecord(value: unknown): value is Record<string, unknown> {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
}

/** How deep brackets and braces nest outside strings. Linear, no recursion. */
export function jsonDepth(text: string): number {
  let depth = 0
  let deepest = 0
  for (let i = 0; i < text.length; i++) {
    const unit = text.charCodeAt(i)
    if (unit === 0x22) {
      for (i++; i < text.length && text.charCodeAt(i) !== 0x22; i++) if (text.charCodeAt(i) === 0x5c) i++
    } else if (unit === 0x5b || unit === 0x7b) {
      depth += 1
      if (depth > deepest) deepest = depth
    } else if (unit === 0x5d || unit === 0x7d) depth -= 1
  }
  return deepest
}

/** Reads JSON text within the limits of size and depth. A byte order mark before it is passed over. */
export function parseJson(text: string): { ok: true; value: unknown } | { ok: false; error: ModelError } {
  if (text.length > longestDocument) {
    return {
      ok: false,
      error: { code: 'too-large', message: 'The document is longer than 1 MiB, which is the limit.' },
    }
  }
  if (jsonDepth(text) > deepestDocument) {
    return { ok: false, error: { code: 'too-deep', message: `The document nests more than ${deepestDocument} deep.` } }
  }
  try {
    return { ok: true, value: JSON.parse(text.startsWith('\ufeff') ? text.slice(1) : text) }
  } catch (error) {
    const place = error instanceof Error ? /position (\d+)/.exec(error.message)?.[1] : undefined
    return {
      ok: false,
      error: {
        code: 'not-json',
        message: `This is not a JSON document${place === undefined ? placeless(text) : placed(text, Number(place))}.`,
      },
    }
  }
}

const placeless = (text: string) => (text.trim() === '' ? ': it is empty' : '')
function placed(text: string, at: number): string {
  const before = text.slice(0, at).split('\n')
  return `: it cannot be read at line ${before.length}, column ${(before.at(-1)?.length ?? 0) + 1} of the file`
}

/**
 * Faults that any value of a document may have, wherever it stands: nesting, numbers that JSON turned into Infinity
 * (1e999), members called __proto__ and half characters. Walks without recursion, so a value handed in as objects may
 * nest as it likes.
 */
export function guardValue(root: unknown): ModelError[] {
  const errors: ModelError[] = []
  interface Visit {
    value: unknown
    step: PropertyKey
    depth: number
    parent: Visit | null
  }
  // Paths are spelled only for faults: a list may have half a million members.
  const pathOf = (visit: Visit) => {
    const path: PropertyKey[] = []
    for (let at = visit; at.parent; at = at.parent) path.unshift(at.step)
    return path
  }
  const waiting: Visit[] = [{ value: root, step: '', depth: 0, parent: null }]
  for (let at = waiting.pop(); at && errors.length < 100; at = waiting.pop()) {
    const { value, depth } = at
    const parent = at
    if (typeof value === 'number' && !Number.isFinite(value)) {
      errors.push({ code: 'not-finite', message: 'This number is too large to be read.', path: pathText(pathOf(at)) })
    } else if (typeof value === 'string') {
      // The equation block tells its own characters, by line and column.
      const block = depth === 1 && at.step === 'equations'
      if (!block && /\p{Cs}/u.test(value))
        errors.push({
          code: 'bad-character',
          message: 'This text holds half a character (a lone surrogate).',
          path: pathText(pathOf(at)),
        })
    } else if (typeof value === 'object' && value !== null) {
      if (depth >= deepestDocument) {
        errors.push({
          code: 'too-deep',
          message: `The document nests more than ${deepestDocument} deep.`,
          path: pathText(pathOf(at).slice(0, 4)),
        })
        break
      }
      if (Array.isArray(value))
        for (let i = value.length - 1; i >= 0; i--) waiting.push({ value: value[i], step: i, depth: depth + 1, parent })
      else {
        for (const [key, member] of Object.entries(value).reverse()) {
          if (key === '__proto__')
            errors.push({
              code: 'unknown-field',
              message: 'A member called __proto__ is not allowed.',
              path: pathText([...pathOf(at), key]),
            })
          else waiting.push({ value: member, step: key, depth: depth + 1, parent })
        }
      }
    }
  }
  return errors
}
