import { readdirSync, readFileSync } from 'node:fs'
import path from 'node:path'
import { describe, expect, test } from 'vitest'
import { z } from 'zod'
import { stabilityCard } from '#shared/model/card-document.ts'
import { modelDocument } from '#shared/model/document.ts'
import { analyse } from '#shared/stability/card.ts'

/**
 * What lies past the ends of a window, period doublings, torus points and homoclinic ends, computed apart from this
 * project (integration with explicit and implicit methods, shooting, Fourier collocation, gap between the manifolds of
 * the saddle). `source` names where each model comes from.
 */
const end = z.object({
  kind: z.string(),
  verdict: z.string().optional(),
  jumpTo: z.string().optional(),
  returnAt: z.number().optional(),
})
const windowCase = z.object({
  source: z.string().min(1),
  sourceNote: z.string(),
  model: modelDocument,
  expect: z.object({
    window: z
      .object({
        from: z.number(),
        to: z.number(),
        low: end,
        high: end,
        kicks: z.array(z.object({ p: z.number(), amplitude: z.number() })),
        coexistsFrom: z.number().optional(),
      })
      .optional(),
    doublings: z.array(z.object({ p: z.number(), period: z.number() })).optional(),
    tori: z.array(z.number()).optional(),
    homoclinic: z.array(z.number()).optional(),
    cycles: z.array(z.object({ p: z.number(), period: z.number(), amplitude: z.number() })).optional(),
  }),
})

const folder = path.join(import.meta.dirname, 'windows')
const cases = readdirSync(folder)
  .sort()
  .map((file) => ({
    name: file.replace('.json', ''),
    reference: windowCase.parse(JSON.parse(readFileSync(path.join(folder, file), 'utf8'))),
  }))

test('fourteen cases are there', () => {
  expect(cases).toHaveLength(14)
})

describe.each(cases)('$name ($reference.source)', ({ reference }) => {
  const { model, expect: want } = reference
  const result = analyse(model, { parts: ['hopf', 'cycles'] })
  if (!result.ok) throw new Error(JSON.stringify(result.errors))
  const card = stabilityCard.parse(result.card)
  const control = model.parameters.find(({ symbol }) => symbol === model.control)
  const range = (control?.high ?? Number.NaN) - (control?.low ?? Number.NaN)

  test('agrees with the figures computed apart', () => {
    const { window } = card
    if (want.window) {
      expect(Math.abs((window?.from ?? Number.NaN) - want.window.from)).toBeLessThan(1e-9 * range)
      expect(Math.abs((window?.to ?? Number.NaN) - want.window.to)).toBeLessThan(1e-9 * range)
      for (const side of ['low', 'high'] as const) {
        const got = window?.[side]
        const { kind, verdict, jumpTo, returnAt } = want.window[side]
        expect([got?.kind, got?.verdict]).toEqual([kind, verdict])
        if (jumpTo !== undefined) expect(got?.jumpTo?.kind).toBe(jumpTo)
        if (returnAt !== undefined) {
          expect(Math.abs((got?.returnAt ?? Number.NaN) - returnAt)).toBeLessThan(1e-7 * range)
        }
        // a soft onset returns by itself: there is no value to tell
        if (verdict === 'soft') expect(got?.returnAt).toBeUndefined()
      }
      for (const { p, amplitude } of want.window.kicks) {
        const kicks = window?.toleratedKick ?? []
        const above = kicks.findIndex((kick) => kick.p >= p)
        const [a, b] = [kicks[above - 1], kicks[above]]
        const s = a && b ? (p - a.p) / (b.p - a.p) : Number.NaN
        const between = (a?.amplitude ?? Number.NaN) * (1 - s) + (b?.amplitude ?? Number.NaN) * s
        expect(Math.abs(between / amplitude - 1), `kick at ${p}`).toBeLessThan(0.01)
      }
      if (want.window.coexistsFrom !== undefined) {
        expect(window?.coexisting).toHaveLength(1)
        expect(window?.coexisting?.[0]?.from).toBeCloseTo(want.window.coexistsFrom, 6)
        expect(window?.coexisting?.[0]?.to).toBeCloseTo(want.window.to, 9)
      }
    }
    for (const { p, period } of want.doublings ?? []) {
      const found = card.cyclePeriodDoublings?.find((each) => Math.abs(each.p - p) < 1e-7 * range)
      expect(found?.period).toBeCloseTo(period, 5)
    }
    for (const p of want.tori ?? []) {
      expect(card.cycleTori?.some((each) => Math.abs(each.p - p) < 1e-9 * range)).toBe(true)
    }
    for (const p of want.homoclinic ?? []) {
      const found = card.cycles?.find(({ end: { kind } }) => kind === 'homoclinic')
      expect(Math.abs((found?.end.p ?? Number.NaN) - p)).toBeLessThan(1e-6 * range)
      expect(card.cycleFolds).toEqual([])
    }
    for (const { p, period, amplitude } of want.cycles ?? []) {
      const [branch, ...others] = card.cycles ?? []
      // a closed island between two onsets is one branch
      expect([others.length, branch?.end.kind]).toEqual([0, 'onset'])
      const points = branch?.points ?? []
      const next = points.findIndex((point) => point.p >= p)
      const [a, b] = [points[next - 1], points[next]]
      const s = a && b ? (p - a.p) / (b.p - a.p) : Number.NaN
      expect(((a?.period ?? 0) * (1 - s) + (b?.period ?? 0) * s) / period).toBeCloseTo(1, 2)
      expect(((a?.amplitude ?? 0) * (1 - s) + (b?.amplitude ?? 0) * s) / amplitude).toBeCloseTo(1, 2)
    }
  })
})
