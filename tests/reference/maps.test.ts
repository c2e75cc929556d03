import { readdirSync, readFileSync } from 'node:fs'
import path from 'node:path'
import { describe, expect, test } from 'vitest'
import { z } from 'zod'
import { type StabilityCard, stabilityCard, verdicts } from '#shared/model/card-document.ts'
import { modelDocument } from '#shared/model/document.ts'
import { analyse } from '#shared/stability/card.ts'

/**
 * Reference maps of two parameters and second Lyapunov coefficients: models from textbooks and papers with closed forms
 * or figures computed apart from this project (50 digits, symbolic derivatives; `verifiedBy` says how they were checked).
 * `fixed` names the coordinate of a sample that is exact. Curves of cycle folds are judged where cycles are.
 */
const sample = z.object({
  p: z.number(),
  s: z.number(),
  omega: z.number().optional(),
  cubic: z.number().optional(),
  verdict: z.enum(verdicts).optional(),
  operating: z.boolean().optional(),
})
const referenceMap = z.object({
  source: z.string().min(1),
  sourceNote: z.string(),
  model: modelDocument,
  expect: z.object({
    map: z.object({
      curves: z.array(z.object({ kind: z.enum(['onset', 'fold', 'cycle-fold']), points: z.array(sample) })),
      points: z.array(
        z.object({
          kind: z.enum(['changeover', 'zero-hopf', 'double-zero', 'double-hopf', 'cusp']),
          p: z.number(),
          s: z.number(),
          omega: z.number().optional(),
          secondLyapunov: z.number().optional(),
        }),
      ),
    }),
    hopf: z
      .array(z.object({ p: z.number(), omega: z.number(), verdict: z.enum(verdicts), secondLyapunov: z.number() }))
      .optional(),
  }),
})
type ReferenceMap = z.infer<typeof referenceMap>
type Sample = z.infer<typeof sample>
type Curves = NonNullable<StabilityCard['map']>['curves']

const folder = path.join(import.meta.dirname, 'maps')
const cases = readdirSync(folder)
  .sort()
  .map((file) => ({
    name: file.replace('.json', ''),
    reference: referenceMap.parse(JSON.parse(readFileSync(path.join(folder, file), 'utf8'))),
  }))

function cardOf({ model }: ReferenceMap): StabilityCard {
  const result = analyse(model, { parts: ['hopf', 'map'] })
  if (!result.ok) throw new Error(JSON.stringify(result.errors))
  return stabilityCard.parse(result.card)
}

function rangeOf({ model }: ReferenceMap, symbol: string | undefined): { low: number; width: number } {
  const found = model.parameters.find((parameter) => parameter.symbol === symbol)
  const [low, high] = [found?.low ?? Number.NaN, found?.high ?? Number.NaN]
  return { low, width: high - low }
}

/** Distance of a sample from the nearest straight piece of a curve, in ranges, with the piece's nearer end. */
function nearest(curves: Curves, want: Sample, p: number, s: number) {
  let best: { away: number; end: Curves[number]['points'][number] } | null = null
  for (const { points, closed } of curves) {
    points.forEach((a, i) => {
      const b = points[i + 1] ?? (closed ? points[0] : undefined)
      if (!b) return
      const [dx, dy] = [(b.p - a.p) / p, (b.s - a.s) / s]
      const [x, y] = [(want.p - a.p) / p, (want.s - a.s) / s]
      const length = dx * dx + dy * dy
      const share = length > 0 ? Math.min(1, Math.max(0, (x * dx + y * dy) / length)) : 0
      const away = Math.hypot(x - share * dx, y - share * dy)
      if (!best || away < best.away) best = { away, end: share < 0.5 ? a : b }
    })
  }
  return best as { away: number; end: Curves[number]['points'][number] } | null
}

test('ten cases are there', () => {
  expect(cases).toHaveLength(10)
})

describe.each(cases)('$name ($reference.source; $reference.sourceNote)', ({ name, reference }) => {
  const card = cardOf(reference)
  const p = rangeOf(reference, reference.model.control)
  const s = rangeOf(reference, reference.model.secondControl)
  const want = reference.expect

  test('every sample lies on a curve of its kind, drawn with straight lines, and has its verdict', () => {
    for (const { kind, points } of want.map.curves) {
      if (kind === 'cycle-fold') continue
      const curves = card.map?.curves.filter((curve) => curve.kind === kind) ?? []
      for (const point of points) {
        const found = nearest(curves, point, p.width, s.width)
        expect(found?.away, `${kind} at ${point.p}, ${point.s}`).toBeLessThan(5e-4)
        if (point.omega !== undefined) expect((found?.end.omega ?? 0) / point.omega).toBeCloseTo(1, 1)
        if (point.verdict !== undefined) expect(found?.end.verdict, `at ${point.p}, ${point.s}`).toBe(point.verdict)
        if (point.operating !== undefined) expect(found?.end.operating).toBe(point.operating)
      }
    }
  })

  test('every special point, with the second Lyapunov coefficient of changeovers', () => {
    const got = card.map?.points ?? []
    for (const point of want.map.points) {
      const found = got.find(
        ({ kind, ...at }) =>
          kind === point.kind && Math.abs(at.p - point.p) < 1e-9 * p.width && Math.abs(at.s - point.s) < 1e-9 * s.width,
      )
      expect(found, `${point.kind} at ${point.p}, ${point.s}`).toBeDefined()
      if (point.omega !== undefined && point.kind === 'changeover')
        expect((found?.omega ?? 0) / point.omega).toBeCloseTo(1, 9)
      if (point.secondLyapunov !== undefined) {
        expect((found?.secondLyapunov ?? 0) / point.secondLyapunov).toBeCloseTo(1, 8)
      }
    }
  })

  // one case lists the changeover at its own value only, not that of the mirror image beyond it
  test('as many special points as the closed forms have, cusps apart', () => {
    const kinds = (points: { kind: string }[]): string[] =>
      points
        .map(({ kind }) => kind)
        .filter((kind) => kind !== 'cusp')
        .sort()
    const got = kinds(card.map?.points ?? [])
    if (name === 'second-lyapunov-fitzhugh') expect(got).toEqual(['changeover', ...kinds(want.map.points)])
    else expect(got).toEqual(kinds(want.map.points))
  })

  test('Hopf points at the own value, where they are degenerate, have the second Lyapunov coefficient', () => {
    for (const point of want.hopf ?? []) {
      const found = card.hopf?.find((each) => Math.abs(each.p - point.p) < 1e-9 * p.width)
      expect(found?.verdict).toBe(point.verdict)
      expect((found?.omega ?? 0) / point.omega).toBeCloseTo(1, 9)
      expect((found?.secondLyapunov ?? 0) / point.secondLyapunov).toBeCloseTo(1, 8)
    }
  })
})
