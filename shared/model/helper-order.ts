import type { Expression } from './expression.ts'

/** Keys of the symbols an expression uses. Iterative, each node visited once. */
export function symbolsOf(expression: Expression): Set<string> {
  const keys = new Set<string>()
  const waiting: Expression[] = [expression]
  for (let at = waiting.pop(); at; at = waiting.pop()) {
    if (at.kind === 'symbol') keys.add(at.key)
    else if (at.kind === 'negate') waiting.push(at.of)
    else if (at.kind === 'binary') waiting.push(at.left, at.right)
    else if (at.kind === 'call') waiting.push(...at.args)
  }
  return keys
}

/** Helpers so ordered that each uses only earlier ones, or the loops that make this impossible. */
export interface HelperOrder<Helper> {
  ordered: Helper[]
  /** Each loop once, as keys in the order of use, the first repeated at the end: q, r, q. */
  loops: string[][]
}

/**
 * Orders helpers by use; among the free ones the order of the text is kept. Loops are found by a depth-first search
 * (Cormen et al., Introduction to Algorithms, 3rd ed., section 22.4: a back edge closes a loop).
 */
export function orderHelpers<Helper extends { key: string; expression: Expression }>(
  helpers: readonly Helper[],
): HelperOrder<Helper> {
  const byKey = new Map(helpers.map((helper) => [helper.key, helper]))
  const uses = new Map(
    helpers.map((helper) => [helper.key, [...symbolsOf(helper.expression)].filter((key) => byKey.has(key))]),
  )
  const state = new Map<string, 'open' | 'done'>()
  const ordered: Helper[] = []
  const loops: string[][] = []

  for (const root of helpers) {
    if (state.has(root.key)) continue
    // An explicit stack: a chain of helpers may be as long as the text allows.
    const path: { key: string; next: number }[] = [{ key: root.key, next: 0 }]
    state.set(root.key, 'open')
    for (let top = path.at(-1); top; top = path.at(-1)) {
      const used = uses.get(top.key)?.[top.next]
      top.next += 1
      if (used === undefined) {
        state.set(top.key, 'done')
        const helper = byKey.get(top.key)
        if (helper) ordered.push(helper)
        path.pop()
      } else if (state.get(used) === 'open') {
        const from = path.findIndex((step) => step.key === used)
        loops.push([...path.slice(from).map((step) => step.key), used])
      } else if (!state.has(used)) {
        state.set(used, 'open')
        path.push({ key: used, next: 0 })
      }
    }
  }
  return { ordered, loops }
}
