/**
 * Which characters an equation block or a symbol may hold, and what to say about the others. Look-alike letters and
 * invisible characters are the danger: a model that reads one way and computes another. Each is named by code point.
 */

/** What is wrong with one character, and what to put in its place where that is plain. */
export interface CharacterFault {
  message: string
  replacement?: string
}

const greekNames =
  'alpha beta gamma delta epsilon zeta eta theta iota kappa lambda mu nu xi omicron pi rho sigma tau upsilon phi chi psi omega'.split(
    ' ',
  )
const smallGreek = 'αβγδεζηθικλμνξοπρστυφχψω'
const capitalGreek = 'ΑΒΓΔΕΖΗΘΙΚΛΜΝΞΟΠΡΣΤΥΦΧΨΩ'

/** Greek letter (after NFKC) to its spelled name. The final sigma is a sigma. */
export const greekLetters: ReadonlyMap<string, string> = new Map([
  ...greekNames.map((name, i) => [smallGreek.charAt(i), name] as const),
  ...greekNames.map((name, i) => [capitalGreek.charAt(i), name.charAt(0).toUpperCase() + name.slice(1)] as const),
  ['ς', 'sigma'] as const,
])

/** Greek letters that print like a Latin one. */
export const greekTwins: ReadonlyMap<string, string> = new Map(
  [...'ΑAΒBΕEΖZΗHΙIΚKΜMΝNΟOΡPΤTΥYΧXοo'.matchAll(/(.)(.)/gu)].map((m) => [m[1] ?? '', m[2] ?? '']),
)

/** Cyrillic letters that print like a Latin one. */
const cyrillicTwins: ReadonlyMap<string, string> = new Map(
  [...'аaеeоoрpсcуyхxіiјjѕsԁdһhԛqԝwАAВBЕEКKМMНHОOРPСCТTУYХXІIЈJЅSԌGԚQԜW'.matchAll(/(.)(.)/gu)].map((m) => [
    m[1] ?? '',
    m[2] ?? '',
  ]),
)

const invisibleNames: ReadonlyMap<number, string> = new Map([
  [0x00ad, 'soft hyphen'],
  [0x034f, 'combining grapheme joiner'],
  [0x061c, 'Arabic letter mark'],
  [0x115f, 'Hangul filler'],
  [0x1160, 'Hangul filler'],
  [0x180e, 'Mongolian vowel separator'],
  [0x200b, 'zero width space'],
  [0x200c, 'zero width non-joiner'],
  [0x200d, 'zero width joiner'],
  [0x200e, 'left-to-right mark'],
  [0x200f, 'right-to-left mark'],
  [0x2028, 'line separator'],
  [0x2029, 'paragraph separator'],
  [0x202a, 'left-to-right embedding'],
  [0x202b, 'right-to-left embedding'],
  [0x202c, 'pop directional formatting'],
  [0x202d, 'left-to-right override'],
  [0x202e, 'right-to-left override'],
  [0x2060, 'word joiner'],
  [0x2061, 'function application'],
  [0x2062, 'invisible times'],
  [0x2063, 'invisible separator'],
  [0x2064, 'invisible plus'],
  [0x2066, 'left-to-right isolate'],
  [0x2067, 'right-to-left isolate'],
  [0x2068, 'first strong isolate'],
  [0x2069, 'pop directional isolate'],
  [0x3164, 'Hangul filler'],
  [0xfeff, 'byte order mark'],
])

const replacements: ReadonlyMap<string, string> = new Map([
  ...[...'‐‑‒–—―﹣－'].map((c) => [c, '-'] as const),
  ...[...'∗⋅•∙●✕✖⨯⨉＊'].map((c) => [c, '*'] as const),
  ...[...'÷∕⁄／'].map((c) => [c, '/'] as const),
  ['＋', '+'],
  ['＾', '^'],
  ['ˆ', '^'],
  ['（', '('],
  ['）', ')'],
  ['＝', '='],
  ['，', ','],
  ['٫', '.'],
  ['＃', '#'],
])

const superscripts = '⁰¹²³⁴⁵⁶⁷⁸⁹'
const superscriptDigit = (character: string) => superscripts.indexOf(character)

/** The code point as U+0430. */
export function codePointName(codePoint: number): string {
  return `U+${codePoint.toString(16).toUpperCase().padStart(4, '0')}`
}

const invisible = /[\p{Default_Ignorable_Code_Point}\p{Cf}\p{Zl}\p{Zp}]/u
/** True for characters that print nothing or steer the direction of writing. */
export function isInvisible(character: string): boolean {
  return invisible.test(character)
}

const blank = /[ \t\u00a0\u2000-\u200a\u202f\u205f\u3000]/
/** Blanks that mean nothing more than a space, typographic ones included. */
export function isBlank(character: string): boolean {
  return blank.test(character)
}

const wordLike = /[\p{L}\p{M}\p{N}_]/u
/** True for what a reader takes for part of a name: any letter, mark or digit of any script, and the underscore. */
export function isWordLike(character: string): boolean {
  return wordLike.test(character) && superscriptDigit(character) < 0
}

function scriptOf(character: string): string {
  if (/\p{Script=Cyrillic}/u.test(character)) return 'Cyrillic'
  if (/\p{Script=Greek}/u.test(character)) return 'Greek'
  if (/\p{Script=Armenian}/u.test(character)) return 'Armenian'
  if (/\p{Script=Cherokee}/u.test(character)) return 'Cherokee'
  if (/\p{Script=Latin}/u.test(character)) return 'Latin'
  return ''
}

/** Why this character may not stand in a block or a symbol. `character` is one code point. */
export function characterFault(character: string): CharacterFault {
  const codePoint = character.codePointAt(0) ?? 0
  const name = codePointName(codePoint)
  if (codePoint >= 0xd800 && codePoint <= 0xdfff)
    return { message: `${name} is half of a character and cannot be read.` }
  if (isInvisible(character)) {
    const known = invisibleNames.get(codePoint)
    return { message: `${name}${known ? ` (${known})` : ''} is invisible and may not stand here.`, replacement: '' }
  }
  if (/\p{Cc}/u.test(character))
    return { message: `${name} is a control character and may not stand here.`, replacement: '' }
  if (superscriptDigit(character) >= 0) {
    const power = `^${superscriptDigit(character)}`
    return {
      message: `${character} (${name}) is a raised digit. Write powers with ^, as in x${power}.`,
      replacement: power,
    }
  }
  const plain = replacements.get(character)
  if (plain !== undefined) return { message: `${character} (${name}) is not read. Write ${plain}.`, replacement: plain }
  const twin = cyrillicTwins.get(character)
  if (twin !== undefined) {
    return {
      message: `${character} (${name}) is a Cyrillic letter that looks like the Latin ${twin}.`,
      replacement: twin,
    }
  }
  if (character === '′' || character === '’' || /[\u0307\u0308]/u.test(character.normalize('NFD'))) {
    return { message: `${character} (${name}) is not read. Write a derivative as dx/dt.` }
  }
  if (/\p{L}/u.test(character)) {
    const script = scriptOf(character)
    return {
      message: `${character} (${name}) is ${script ? `a ${script} letter` : 'a letter'} that symbols may not hold. Use Latin or Greek letters.`,
    }
  }
  const folded = character.normalize('NFKC')
  if (/^[0-9]$/.test(folded))
    return { message: `${character} (${name}) is not an ordinary digit. Write ${folded}.`, replacement: folded }
  if (/[\p{Co}\p{Cn}]/u.test(character)) return { message: `${name} is not a character that can be read.` }
  return { message: `${character} (${name}) is not read here.` }
}
