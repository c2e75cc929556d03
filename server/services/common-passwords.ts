import { readFileSync } from 'node:fs'

const words: ReadonlySet<string> = new Set(
  readFileSync(new URL('./common-words.txt', import.meta.url), 'utf8')
    .split(/\s+/)
    .filter((word) => word.length > 2),
)
const longest = Math.max(...[...words].map((word) => word.length))

/** What people do to a word to make it look different. */
const disguises: ReadonlyMap<string, string> = new Map(
  Object.entries({ '@': 'a', 4: 'a', 3: 'e', 1: 'i', '!': 'i', 0: 'o', 5: 's', $: 's', 7: 't', '|': 'l' }),
)
const squeezed = (text: string) => text.replace(/[^\p{L}\p{N}@$!|]+/gu, '')
const plain = (text: string) => [...text].map((sign) => disguises.get(sign) ?? sign).join('')

const rows = [
  'qwertyuiop',
  'asdfghjkl',
  'zxcvbnm',
  '01234567890',
  'abcdefghijklmnopqrstuvwxyz',
  'qwertzuiop',
  'azertyuiop',
]
const walks = rows.flatMap((row) => [row, [...row].reverse().join('')])

/** Length of the run that begins at `from` and takes no thought: one sign repeated, or neighbours on a row or in the alphabet. */
function runLength(text: string, from: number): number {
  let same = 1
  while (from + same < text.length && text[from + same] === text[from]) same++
  let walk = 1
  while (from + walk < text.length && walks.some((row) => row.includes(text.slice(from, from + walk + 1)))) walk++
  return Math.max(same, walk)
}

/**
 * Fewest pieces that a text falls into: common words, runs, figures of up to four digits, or, at the price of one each,
 * single signs. The same piece again costs nothing.
 */
function piecesOf(text: string, extra: ReadonlySet<string>): number {
  const limit = Math.max(longest, ...[...extra].map((word) => word.length))
  // best[i]: cheapest way to the first i signs, with the pieces used on it.
  const best: ({ cost: number; used: ReadonlySet<string> } | undefined)[] = [{ cost: 0, used: new Set() }]
  for (let from = 0; from < text.length; from++) {
    const here = best[from]
    if (!here) continue
    const offer = (piece: string) => {
      const cost = here.cost + (here.used.has(piece) ? 0 : 1)
      const known = best[from + piece.length]
      if (!known || cost < known.cost) best[from + piece.length] = { cost, used: new Set([...here.used, piece]) }
    }
    offer(text.slice(from, from + 1))
    const run = runLength(text, from)
    if (run > 2) offer(text.slice(from, from + run))
    const figures = /^\d{1,4}/.exec(text.slice(from, from + 4))?.[0]
    if (figures) offer(figures)
    for (let length = 3; length <= Math.min(limit, text.length - from); length++) {
      const piece = text.slice(from, from + length)
      if (words.has(piece) || extra.has(piece)) offer(piece)
    }
  }
  return best[text.length]?.cost ?? text.length
}

/**
 * Whether a password is among those that are tried first: it is made of no more than two common pieces (words that lead
 * every list of leaked passwords, keyboard walks, years, repetitions), whatever the capitals, signs between them and
 * figures for letters. The list is from memory and general knowledge, not from any leak.
 *
 * @param about Words that are common for this person: name, e-mail address.
 */
export function isCommonPassword(password: string, about: readonly string[]): boolean {
  const given = about.map((text) => text.toLowerCase())
  const parts = given.flatMap((text) => text.split(/[^\p{L}\p{N}]+/u))
  const extra = new Set([...parts, ...given, ...given.map(squeezed)].filter((word) => word.length > 2))
  const lower = password.toLowerCase()
  const bare = squeezed(lower)
  const forms = [lower, bare, bare.replace(/[@$!|]+$/, ''), plain(bare), plain(bare.replace(/[\d@$!|]+$/, ''))]
  return forms.some((form) => piecesOf(form, extra) <= 2)
}
