import { describe, expect, test } from 'vitest'
import { integrateDense } from '#shared/numerics/dormand-prince-853.ts'

const oscillator = (y: Float64Array, out: Float64Array): void => {
  out[0] = y[1] as number
  out[1] = -(y[0] as number)
}
const absolute = Float64Array.of(1e-13, 1e-13)

describe('the harmonic oscillator, x = cos t', () => {
  test('is met to the tolerance after ten turns, energy included', () => {
    const span = 20 * Math.PI
    const result = integrateDense(oscillator, Float64Array.of(1, 0), { span, relative: 1e-12, absolute })
    expect(result.ok).toBe(true)
    expect(result.y[0]).toBeCloseTo(1, 10)
    expect(result.y[1]).toBeCloseTo(0, 10)
  })

  test('the error falls like the eighth power of the step', () => {
    const errorAt = (maxStep: number): number => {
      // a tolerance that never binds: the steps are those asked for
      const options = { span: 4, relative: 1, absolute: Float64Array.of(1e3, 1e3), maxStep }
      const { y } = integrateDense(oscillator, Float64Array.of(1, 0), options)
      return Math.hypot((y[0] as number) - Math.cos(4), (y[1] as number) + Math.sin(4))
    }
    const order = Math.log2(errorAt(0.5) / errorAt(0.25))
    expect(order).toBeGreaterThan(7.5)
    expect(order).toBeLessThan(9.5)
  })

  test('dense output is of order seven between the steps and joins them', () => {
    let worst = 0
    const out = new Float64Array(2)
    integrateDense(oscillator, Float64Array.of(1, 0), {
      span: 6,
      relative: 1e-10,
      absolute,
      onStep: ({ t, h, y, at }) => {
        for (let k = 0; k <= 10; k++) {
          at(k / 10, out)
          worst = Math.max(worst, Math.abs((out[0] as number) - Math.cos(t + (k / 10) * h)))
        }
        expect(out).toEqual(y)
        return false
      },
    })
    expect(worst).toBeLessThan(1e-9)
  })

  test('events: every falling zero of x at pi/2 + 2 pi k, ended by the third', () => {
    const times: number[] = []
    const result = integrateDense(oscillator, Float64Array.of(1, 0), {
      span: 100,
      relative: 1e-12,
      absolute,
      events: [{ g: (y) => y[0] as number, direction: -1, onEvent: (t) => times.push(t) === 3 }],
    })
    expect(result.ok && result.ended).toBe('asked')
    expect(times).toEqual([0, 1, 2].map((k) => expect.closeTo(Math.PI / 2 + 2 * Math.PI * k, 9)))
    expect(result.t).toBe(times[2])
  })
})

test('the Arenstorf orbit closes after its period (Hairer, Norsett & Wanner I, II.0; figures from memory)', () => {
  const mu = 0.012277471
  const f = (y: Float64Array, out: Float64Array): void => {
    const [x = 0, v = 0, dx = 0, dv = 0] = y
    const d1 = ((x + mu) ** 2 + v ** 2) ** 1.5
    const d2 = ((x - 1 + mu) ** 2 + v ** 2) ** 1.5
    out[0] = dx
    out[1] = dv
    out[2] = x + 2 * dv - ((1 - mu) * (x + mu)) / d1 - (mu * (x - 1 + mu)) / d2
    out[3] = v - 2 * dx - ((1 - mu) * v) / d1 - (mu * v) / d2
  }
  const start = Float64Array.of(0.994, 0, 0, -2.001585106379082)
  const result = integrateDense(f, start, {
    span: 17.065216560157964,
    relative: 1e-13,
    absolute: new Float64Array(4).fill(1e-14),
  })
  expect(result.y[0]).toBeCloseTo(0.994, 5)
  expect(result.y[1]).toBeCloseTo(0, 4)
})

test('a stiff problem and a blow-up are told', () => {
  const stiff = (y: Float64Array, out: Float64Array): void => {
    out[0] = -1e5 * ((y[0] as number) - 1)
  }
  const one = Float64Array.of(1e-9)
  expect(integrateDense(stiff, Float64Array.of(2), { span: 10, absolute: one })).toMatchObject({ reason: 'stiff' })
  const blowUp = (y: Float64Array, out: Float64Array): void => {
    out[0] = (y[0] as number) ** 2
  }
  const result = integrateDense(blowUp, Float64Array.of(1), { span: 2, absolute: one })
  expect(result.ok).toBe(false)
  expect(result.t).toBeCloseTo(1, 6)
})
