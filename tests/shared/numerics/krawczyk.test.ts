import { describe, expect, it } from 'vitest'
import { addInterval, mulInterval, subInterval } from '#shared/numerics/interval.ts'
import {
  createNewton,
  type IntervalSystem,
  isInjective,
  linearise,
  proveNear,
  provesZero,
  sweep,
} from '#shared/numerics/krawczyk.ts'

const at = (a: ArrayLike<number>, i: number): number => a[i] ?? Number.NaN

/** x² + y² = 4, x y = 1: zeros at ±(1.93185.., 0.51763..) and with x, y exchanged: x = (√6 ± √2)/2. */
const system: IntervalSystem = {
  n: 2,
  value(xlo, xhi, outLo, outHi) {
    const [lo, hi] = [
      Float64Array.of(at(xlo, 0), at(xlo, 1), 4, 1, 0, 0, 0),
      Float64Array.of(at(xhi, 0), at(xhi, 1), 4, 1, 0, 0, 0),
    ]
    mulInterval(lo, hi, 4, 0, 0)
    mulInterval(lo, hi, 5, 1, 1)
    addInterval(lo, hi, 6, 4, 5)
    subInterval(lo, hi, 4, 6, 2)
    mulInterval(lo, hi, 6, 0, 1)
    subInterval(lo, hi, 5, 6, 3)
    for (const i of [0, 1]) {
      outLo[i] = at(lo, 4 + i)
      outHi[i] = at(hi, 4 + i)
    }
  },
  jacobian(xlo, xhi, outLo, outHi) {
    outLo.set([2 * at(xlo, 0), 2 * at(xlo, 1), at(xlo, 1), at(xlo, 0)])
    outHi.set([2 * at(xhi, 0), 2 * at(xhi, 1), at(xhi, 1), at(xhi, 0)])
  },
  isDefined: () => true,
}
const root = Float64Array.of((Math.sqrt(6) + Math.sqrt(2)) / 2, (Math.sqrt(6) - Math.sqrt(2)) / 2)

describe('interval Newton', () => {
  it('proves a zero in a small box around it and none beside it', () => {
    const ws = createNewton(2)
    const box = (r: number, shift = 0) => [root.map((v) => v + shift - r), root.map((v) => v + shift + r)] as const
    expect(provesZero(ws, system, root, ...box(0.1))).toBe(true)
    expect(
      provesZero(
        ws,
        system,
        root.map((v) => v + 0.3),
        ...box(0.1, 0.3),
      ),
    ).toBe(false)
    // The other zero, with x and y exchanged, is inside too: nothing can be proved.
    expect(
      provesZero(ws, system, Float64Array.of(1.2, 1.2), Float64Array.of(0.3, 0.3), Float64Array.of(2.1, 2.1)),
    ).toBe(false)
  })

  it('grows a box until the proof succeeds, and refuses points that are no zeros', () => {
    const ws = createNewton(2)
    const [lo, hi] = [new Float64Array(2), new Float64Array(2)]
    expect(proveNear(ws, system, root, Float64Array.of(4, 4), lo, hi)).toBeLessThanOrEqual(1e-12)
    expect(at(lo, 0) < at(root, 0) && at(root, 0) < at(hi, 0)).toBe(true)
    expect(proveNear(ws, system, Float64Array.of(1, 1), Float64Array.of(4, 4), lo, hi)).toBeNull()
  })

  it('sweeps a box down onto its zero and away where there is none', () => {
    const ws = createNewton(2)
    const [lo, hi] = [root.map((v) => v - 0.2), root.map((v) => v + 0.3)]
    for (let pass = 0; pass < 8; pass++) {
      expect(linearise(ws, system, lo, hi)).toBe(true)
      expect(isInjective(ws, lo, hi) || pass === 0).toBe(true)
      expect(
        sweep(
          ws,
          system,
          lo.map((v, j) => (v + at(hi, j)) / 2),
          lo,
          hi,
        ),
      ).toBe(true)
      expect([0, 1].every((j) => at(lo, j) <= at(root, j) && at(root, j) <= at(hi, j))).toBe(true)
    }
    expect(at(hi, 0) - at(lo, 0)).toBeLessThan(1e-14)
    const [farLo, farHi] = [Float64Array.of(2.2, 0.9), Float64Array.of(2.4, 1.1)]
    expect(linearise(ws, system, farLo, farHi)).toBe(true)
    expect(sweep(ws, system, Float64Array.of(2.3, 1), farLo, farHi)).toBe(false)
  })

  it('says nothing where the Jacobian is singular', () => {
    const ws = createNewton(2)
    expect(linearise(ws, system, Float64Array.of(-1, -1), Float64Array.of(1, 1))).toBe(false)
  })
})
