import { characterFault, greekLetters, greekTwins, isInvisible } from './characters.ts'
import { functionNames } from './expression.ts'

/**
 * Symbols: letters, digits and underscore, starting with a letter. Two spellings that fold to one key are one symbol:
 * NFKC (µ U+00B5 is μ, x₁ is x1), then every Greek letter spelled out (μ is mu). Case matters.
 */

const asciiSymbol = /^[A-Za-z][A-Za-z0-9_]*$/
// Latin letters with accents are letters; the dotless i and j, kra and the apostrophe n are left out as look-alikes.
const latin = 'A-Za-zÀ-ÖØ-öø-İĲ-ķĹ-ňŊ-ž'
const foldedSymbol = new RegExp(`^[${latin}][${latin}0-9_]*$`)
const foldedPart = new RegExp(`^[${latin}0-9_]+$`)
const raised = /[ªºʰ-ʸˠ-ˤᴬ-ᵡᵸᶛ-ᶿ⁰-ⁿ¹²³ⱽꟸ-ꟹ]/
const knownParts = new Map<string, string | null>()

/** Longest symbol, in characters of its folded key. */
export const longestSymbol = 64

/** What one character contributes to a key, or null where it may not stand in a symbol. */
function foldCharacter(character: string): string | null {
  let part = knownParts.get(character)
  if (part !== undefined) return part
  part = null
  if (!raised.test(character)) {
    const normal = character.normalize('NFKC')
    const spelled = greekLetters.get(normal) ?? normal
    if (foldedPart.test(spelled)) part = spelled
  }
  if (knownParts.size < 2000) knownParts.set(character, part)
  return part
}

/** The canonical key of a symbol as typed, or null where it is not a valid symbol. */
export function foldSymbol(typed: string): string | null {
  if (asciiSymbol.test(typed)) return typed
  let key = ''
  for (const character of typed.normalize('NFC')) {
    const part = foldCharacter(character)
    if (part === null) return null
    key += part
  }
  return foldedSymbol.test(key) ? key : null
}

/** One character of a symbol that may not stand in it; `offset` counts UTF-16 units into what was typed. */
export interface SymbolCharacterFault {
  offset: number
  length: number
  message: string
  replacement?: string
}

/** Every character of a word that no symbol may hold. Empty where all may (the word may still start with a digit). */
export function symbolCharacterFaults(typed: string): SymbolCharacterFault[] {
  const faults: SymbolCharacterFault[] = []
  if (/^[\x20-\x7e]*$/.test(typed) || foldSymbol(typed) !== null) return faults
  let offset = 0
  for (const character of typed) {
    if (character > '\x7e' && foldCharacter(character) === null) {
      faults.push({ offset, length: character.length, ...characterFault(character) })
    }
    offset += character.length
  }
  return faults
}

/** Names nobody may declare: pi, the time t and the functions. `e` may be declared and then wins over the constant. */
const reserved: ReadonlySet<string> = new Set(['pi', 't', ...functionNames])

/** True where the key may not be declared. */
export function isReserved(key: string): boolean {
  return reserved.has(key)
}

/** How a symbol looks in print: two different keys of one look cannot be told apart on a page. */
export function printedLook(typed: string): string {
  if (asciiSymbol.test(typed)) return typed
  let look = ''
  for (const character of typed)
    if (!isInvisible(character)) look += greekTwins.get(character) ?? character.normalize('NFKC')
  return look
}

/** What a symbol typed into a table lacks, in words; null where it is valid and free to be declared. */
export function symbolFault(
  typed: string,
): { code: 'missing-field' | 'syntax' | 'bad-character' | 'reserved-symbol' | 'too-large'; message: string } | null {
  if (typed.trim() === '') return { code: 'missing-field', message: 'Give the symbol.' }
  const [fault] = symbolCharacterFaults(typed)
  if (fault) return { code: 'bad-character', message: `In the symbol, ${fault.message}` }
  const key = foldSymbol(typed)
  if (key === null) {
    return {
      code: 'syntax',
      message: `${quoted(typed)} is not a symbol: letters, digits and underscore, starting with a letter.`,
    }
  }
  if (key.length > longestSymbol)
    return { code: 'too-large', message: `A symbol may have ${longestSymbol} characters; this one has ${key.length}.` }
  if (isReserved(key)) {
    const why = key === 't' ? 'the time' : key === 'pi' ? 'a constant' : 'a function'
    return { code: 'reserved-symbol', message: `${quoted(typed)} is reserved: it is ${why}. Choose another symbol.` }
  }
  return null
}

/** Text of a user's inside a message: shortened, with invisible characters shown by code point. */
export function quoted(text: string): string {
  let shown = ''
  for (const character of text) {
    if (shown.length >= 40) return `${shown}…`
    const hidden = isInvisible(character) || /[\p{Cc}\p{Cs}]/u.test(character)
    shown += hidden ? `[U+${(character.codePointAt(0) ?? 0).toString(16).toUpperCase().padStart(4, '0')}]` : character
  }
  return shown
}
