import { readFileSync } from 'node:fs'
import path from 'node:path'
import { describe, expect, test } from 'vitest'

// The colours as shipped, read from the style sheet itself.
const css = readFileSync(path.resolve(import.meta.dirname, '../../src/styles/tokens.css'), 'utf8')
const tokens = new Map(
  [...css.matchAll(/--color-([a-z0-9-]+): light-dark\((#[0-9a-f]{6}), (#[0-9a-f]{6})\)/g)].map(
    ([, name = '', light = '', dark = '']) => [name, { light, dark }] as const,
  ),
)

// Relative luminance and contrast ratio: WCAG 2.2, definitions of "relative luminance" and "contrast ratio".
function luminance(hex: string): number {
  const [r = 0, g = 0, b = 0] = [1, 3, 5].map((start) => {
    const part = Number.parseInt(hex.slice(start, start + 2), 16) / 255
    return part <= 0.04045 ? part / 12.92 : ((part + 0.055) / 1.055) ** 2.4
  })
  return 0.2126 * r + 0.7152 * g + 0.0722 * b
}
function contrast(a: string, b: string, scheme: 'light' | 'dark'): number {
  const [one, two] = [a, b].map((name) => luminance(tokens.get(name)?.[scheme] ?? '#000000'))
  const [high, low] = [Math.max(one ?? 0, two ?? 0), Math.min(one ?? 0, two ?? 0)]
  return (high + 0.05) / (low + 0.05)
}

const schemes = ['light', 'dark'] as const
const textual = ['ink', 'ink-2', 'ink-3', 'soft', 'hard', 'open', 'window', 'kick', 'evidence', 'fault']

describe('colour tokens', () => {
  test('the formula gives 21 for black on white', () => {
    expect((luminance('#ffffff') + 0.05) / (luminance('#000000') + 0.05)).toBeCloseTo(21, 10)
  })

  test('every token has a light and a dark value', () => {
    expect(tokens.size).toBe(22)
  })

  test.each(textual)('%s reads as text on sheet and film, light and dark', (name) => {
    for (const scheme of schemes) {
      for (const ground of ['sheet', 'film', 'well']) expect(contrast(name, ground, scheme)).toBeGreaterThanOrEqual(4.5)
    }
  })

  test('control edges and axes reach 3 to 1 on sheet and film', () => {
    for (const scheme of schemes) {
      for (const ground of ['sheet', 'film']) expect(contrast('line', ground, scheme)).toBeGreaterThanOrEqual(3)
    }
  })

  test.each(['soft', 'hard', 'open', 'window', 'kick'])('%s reads on its own tint', (name) => {
    for (const scheme of schemes) expect(contrast(name, `${name}-tint`, scheme)).toBeGreaterThanOrEqual(4.5)
  })

  test('the pairs of buttons and selected rows', () => {
    for (const scheme of schemes) {
      expect(contrast('sheet', 'ink', scheme)).toBeGreaterThanOrEqual(4.5)
      expect(contrast('sheet', 'ink-2', scheme)).toBeGreaterThanOrEqual(4.5)
      expect(contrast('ink', 'pencil-tint', scheme)).toBeGreaterThanOrEqual(4.5)
      expect(contrast('ink-2', 'pencil-tint', scheme)).toBeGreaterThanOrEqual(4.5)
    }
  })
})
