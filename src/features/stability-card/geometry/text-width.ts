/**
 * Widths of text in the two faces of the drawing, so that labels can be placed without a browser: same input, same
 * picture. Advance widths in hundredths of the size, measured once from the shipped fonts (Sofia Sans 400, Martian Mono
 * at 80 % width); the heavier weight of the words is 2 % wider.
 */
const narrow: Readonly<Record<string, number>> = {
  ' ': 21,
  '!': 23,
  '(': 27,
  ')': 27,
  ',': 23,
  '.': 23,
  '/': 28,
  ':': 23,
  ';': 24,
  "'": 19,
  '·': 24,
  '1': 45,
  I: 26,
  J: 26,
  f: 36,
  i: 24,
  j: 24,
  l: 24,
  r: 36,
  t: 39,
  '’': 23,
  '°': 39,
  '¹': 40,
  '²': 40,
  '³': 40,
  '⁰': 40,
  '⁴': 40,
  '⁵': 40,
  '⁶': 40,
  '⁷': 40,
  '⁸': 40,
  '⁹': 40,
}
const wide: Readonly<Record<string, number>> = {
  '%': 94,
  '&': 67,
  '+': 60,
  '=': 60,
  '<': 60,
  '>': 60,
  '−': 60,
  '×': 60,
  '±': 60,
  '@': 100,
  '…': 70,
  '#': 60,
  $: 63,
  C: 63,
  D: 64,
  G: 65,
  H: 66,
  M: 77,
  N: 66,
  O: 64,
  Q: 64,
  R: 60,
  U: 64,
  W: 85,
  m: 84,
  w: 72,
  μ: 64,
}
const usual = 54
const figure = 62

/** Width in pixels of words set at `size` pixels. */
export function wordsWidth(text: string, size: number, bold = false): number {
  let hundredths = 0
  for (const character of text) hundredths += narrow[character] ?? wide[character] ?? usual
  return (hundredths * size * (bold ? 1.02 : 1)) / 100
}

/** Width in pixels of figures (the mono face) set at `size` pixels. */
export function figuresWidth(text: string, size: number): number {
  return ([...text].length * figure * size) / 100
}
