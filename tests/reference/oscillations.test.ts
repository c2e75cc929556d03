import { readFileSync } from 'node:fs'
import path from 'node:path'
import { describe, expect, test } from 'vitest'
import { z } from 'zod'
import { type StabilityCard, stabilityCard } from '#shared/model/card-document.ts'
import { analyse } from '#shared/stability/card.ts'
import { referenceCases } from './read-case.ts'

/**
 * Cycles and their turning points of the reference cases, computed apart from this project: shooting with an explicit
 * method of order 8 at 1e-12 and Newton's method on the period map, and Fourier collocation with up to 401 points; both
 * agree to 11 digits or more but where `amplitudeShare` says how far the amplitude can be trusted.
 */
const oscillations = z
  .array(
    z.object({
      case: z.string(),
      cycles: z.array(
        z.object({
          p: z.number(),
          period: z.number(),
          amplitude: z.number(),
          min: z.number(),
          max: z.number(),
          stable: z.boolean(),
          multipliers: z.array(z.tuple([z.number(), z.number()])),
        }),
      ),
      folds: z.array(
        z.object({ p: z.number(), amplitude: z.number(), period: z.number(), amplitudeShare: z.number().optional() }),
      ),
    }),
  )
  .parse(JSON.parse(readFileSync(path.join(import.meta.dirname, 'oscillations.json'), 'utf8')))

const models = referenceCases()

/** Straight lines between neighbouring points of every branch at control value p. */
function onLines(card: StabilityCard, p: number) {
  return (card.cycles ?? []).flatMap(({ points }) =>
    points.slice(1).flatMap((b, i) => {
      const a = points[i]
      if (!a || (a.p - p) * (b.p - p) > 0 || a.p === b.p) return []
      const s = (p - a.p) / (b.p - a.p)
      return [
        {
          period: a.period + s * (b.period - a.period),
          amplitude: a.amplitude + s * (b.amplitude - a.amplitude),
          stable: (s < 0.5 ? a : b).stable,
        },
      ]
    }),
  )
}

describe.each(oscillations)('oscillations of $case', ({ case: name, cycles, folds }) => {
  const reference = models.find((each) => each.name === name)?.reference
  const result = analyse(reference?.model, { parts: ['cycles'] })
  if (!result.ok) throw new Error(JSON.stringify(result.errors))
  const card = stabilityCard.parse(result.card)
  const control = reference?.model.parameters.find(({ symbol }) => symbol === reference.model.control)
  const range = (control?.high ?? Number.NaN) - (control?.low ?? Number.NaN)

  test('nothing was cut short', () => {
    expect(card.cycles?.length).toBeGreaterThan(0)
    expect(card.cycles?.map(({ end }) => end.kind)).not.toContain('budget')
    expect(card.warnings.filter(({ code }) => code === 'budget-spent')).toEqual([])
  })

  // the card's promise: straight lines between points are within 1 % of amplitude and period
  test.each(cycles)('at p = $p: amplitude $amplitude, period $period', (want) => {
    const near = onLines(card, want.p).filter(
      ({ period, amplitude }) =>
        Math.abs(period / want.period - 1) < 0.01 && Math.abs(amplitude / want.amplitude - 1) < 0.01,
    )
    expect(near.map(({ stable }) => stable)).toContain(want.stable)
  })

  if (folds.length > 0) {
    test('every turning point, to 1e-9 of the range, and each a point of its branch', () => {
      for (const want of folds) {
        const found = card.cycleFolds?.filter(({ p }) => Math.abs(p - want.p) < 1e-9 * range)
        expect(found, `turning point at ${want.p}`).toHaveLength(1)
        const [fold] = found ?? []
        if (!fold) continue
        expect(Math.abs(fold.amplitude / want.amplitude - 1)).toBeLessThan(want.amplitudeShare ?? 5e-4)
        expect(
          card.cycles?.some(({ points }) =>
            points.some(({ p, amplitude }) => p === fold.p && amplitude === fold.amplitude),
          ),
        ).toBe(true)
      }
    })
  }
})
