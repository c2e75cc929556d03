/**
 * Distance between two words in insertions, deletions, replacements and swaps of neighbours (optimal string alignment;
 * Damerau, Communications of the ACM 7 (1964) 171). Returns a number above `most` as soon as it is known to exceed it.
 */
export function editDistance(a: string, b: string, most: number): number {
  if (Math.abs(a.length - b.length) > most) return most + 1
  let beforeLast: number[] = []
  let last = Array.from({ length: b.length + 1 }, (_, j) => j)
  for (let i = 1; i <= a.length; i++) {
    const row = [i]
    let least = i
    for (let j = 1; j <= b.length; j++) {
      const same = a.charAt(i - 1) === b.charAt(j - 1)
      let cost = Math.min((last[j] ?? 0) + 1, (row[j - 1] ?? 0) + 1, (last[j - 1] ?? 0) + (same ? 0 : 1))
      if (i > 1 && j > 1 && a.charAt(i - 1) === b.charAt(j - 2) && a.charAt(i - 2) === b.charAt(j - 1)) {
        cost = Math.min(cost, (beforeLast[j - 2] ?? 0) + 1)
      }
      row.push(cost)
      least = Math.min(least, cost)
    }
    if (least > most) return most + 1
    beforeLast = last
    last = row
  }
  return last[b.length] ?? most + 1
}

/** Up to two names that the unknown one may have been meant for, nearest first; empty where none is near. */
export function nearestNames(unknown: string, names: Iterable<string>): string[] {
  if (unknown.length > 64) return []
  const most = unknown.length <= 3 ? 1 : 2
  const near: { name: string; distance: number }[] = []
  for (const name of names) {
    const other = name.toLowerCase() === unknown.toLowerCase()
    const distance = other ? 0.5 : editDistance(unknown, name, most)
    // One letter for another letter is no likeness.
    if (distance <= most && (other || distance < Math.max(unknown.length, name.length))) near.push({ name, distance })
  }
  near.sort((a, b) => a.distance - b.distance || (a.name < b.name ? -1 : 1))
  return near.slice(0, 2).map((one) => one.name)
}

/**
 * `nearestNames` for many unknown words against the same names: each word is looked up once, and after 50 different
 * ones no more are, so that a text full of unknown words costs no more than a text with a few.
 */
export function nameAdviser(names: readonly string[]): (unknown: string) => string[] {
  const known = new Map<string, string[]>()
  return (unknown) => {
    const before = known.get(unknown)
    if (before) return before
    const found = known.size < 50 ? nearestNames(unknown, names) : []
    if (known.size < 50) known.set(unknown, found)
    return found
  }
}
