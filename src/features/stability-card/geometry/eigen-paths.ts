export interface Complex {
  re: number
  im: number
}

/**
 * Puts the eigenvalues of neighbouring points of a branch into one order, so that position k is the same eigenvalue all
 * along. Each point's list is matched to where the two points before it lead, the closest pair first.
 *
 * Where two real eigenvalues meet and leave the axis as a pair, either may become either: the paths stay connected.
 */
export function inOneOrder(lists: readonly (readonly Complex[])[]): Complex[][] {
  const ordered: Complex[][] = []
  for (const list of lists) {
    const last = ordered.at(-1)
    const before = ordered.at(-2)
    if (!last || last.length !== list.length) {
      ordered.push([...list])
      continue
    }
    const expected = last.map((value, k) => {
      const earlier = before?.[k]
      return earlier && before?.length === last.length
        ? { re: 2 * value.re - earlier.re, im: 2 * value.im - earlier.im }
        : value
    })
    ordered.push(matched(expected, list))
  }
  return ordered
}

function matched(expected: readonly Complex[], list: readonly Complex[]): Complex[] {
  const pairs: { from: number; to: number; gap: number }[] = []
  expected.forEach((value, from) => {
    list.forEach((other, to) => {
      pairs.push({ from, to, gap: Math.hypot(value.re - other.re, value.im - other.im) })
    })
  })
  pairs.sort((a, b) => a.gap - b.gap || a.from - b.from || a.to - b.to)
  const result: (Complex | undefined)[] = expected.map(() => undefined)
  const used = new Set<number>()
  for (const { from, to } of pairs) {
    if (result[from] !== undefined || used.has(to)) continue
    result[from] = list[to]
    used.add(to)
  }
  return result.map((value, k) => value ?? list[k] ?? { re: 0, im: 0 })
}

/** The largest real part: the rate at which the slowest disturbance dies out (negative) or grows. Null for an empty list. */
export function growthRate(eigenvalues: readonly Complex[]): number | null {
  return eigenvalues.length === 0 ? null : Math.max(...eigenvalues.map((value) => value.re))
}

export const between = (a: Complex, b: Complex, t: number): Complex => ({
  re: a.re + (b.re - a.re) * t,
  im: a.im + (b.im - a.im) * t,
})
