import { describe, expect, test } from 'vitest'
import { integrate } from '#shared/numerics/dormand-prince.ts'
import { integrateStiff } from '#shared/numerics/rosenbrock.ts'

const tolerance = (n: number, value: number) => new Float64Array(n).fill(value)

describe('explicit pair', () => {
  test("the circle x' = -y, y' = x comes back after 2 pi", () => {
    const f = (y: Float64Array, out: Float64Array) => {
      out[0] = -(y[1] ?? 0)
      out[1] = y[0] ?? 0
    }
    const errors = [1e-6, 1e-9].map((relative) => {
      const result = integrate(f, Float64Array.of(1, 0), {
        span: 2 * Math.PI,
        relative,
        absolute: tolerance(2, relative),
      })
      if (!result.ok) throw new Error(result.reason)
      expect(result.t).toBeCloseTo(2 * Math.PI, 12)
      return Math.hypot((result.y[0] ?? 0) - 1, result.y[1] ?? 0)
    })
    expect(errors[0]).toBeLessThan(1e-5)
    expect(errors[1]).toBeLessThan(1e-8)
  })

  test('order 5: a thousandth of the tolerance costs about four times the steps', () => {
    const f = (y: Float64Array, out: Float64Array) => {
      out[0] = (y[0] ?? 0) * Math.cos(y[1] ?? 0)
      out[1] = 1
    }
    const steps = [1e-6, 1e-9].map((relative) => {
      const result = integrate(f, Float64Array.of(1, 0), { span: 20, relative, absolute: tolerance(2, relative) })
      if (!result.ok) throw new Error(result.reason)
      // x = exp(sin t)
      expect(Math.abs((result.y[0] ?? 0) / Math.exp(Math.sin(20)) - 1)).toBeLessThan(100 * relative)
      return result.steps
    })
    const ratio = (steps[1] ?? 0) / (steps[0] ?? 1)
    expect(ratio).toBeGreaterThan(2.5)
    expect(ratio).toBeLessThan(6)
  })

  test('says stiff, not finite, and too many steps, and stops when asked', () => {
    const fast = (y: Float64Array, out: Float64Array) => {
      out[0] = -1e5 * ((y[0] ?? 0) - Math.sin(y[1] ?? 0))
      out[1] = 1
    }
    const stiff = integrate(fast, Float64Array.of(0, 0), { span: 10, absolute: tolerance(2, 1e-6), relative: 1e-5 })
    expect(stiff).toMatchObject({ ok: false, reason: 'stiff' })
    const blowUp = (y: Float64Array, out: Float64Array) => {
      out[0] = (y[0] ?? 0) ** 2
    }
    const gone = integrate(blowUp, Float64Array.of(1), { span: 2, absolute: tolerance(1, 1e-9), maxSteps: 5000 })
    expect(gone.ok).toBe(false)
    const log = (y: Float64Array, out: Float64Array) => {
      out[0] = Math.log(y[0] ?? 0)
    }
    expect(integrate(log, Float64Array.of(-1), { span: 1, absolute: tolerance(1, 1e-9) })).toMatchObject({
      ok: false,
      reason: 'not-finite',
    })
    const turn = (y: Float64Array, out: Float64Array) => {
      out[0] = -(y[1] ?? 0)
      out[1] = y[0] ?? 0
    }
    const few = integrate(turn, Float64Array.of(1, 0), { span: 1e6, absolute: tolerance(2, 1e-9), maxSteps: 50 })
    expect(few).toMatchObject({ ok: false, reason: 'too-many-steps', steps: 50 })
    const asked = integrate(turn, Float64Array.of(1, 0), {
      span: 9,
      absolute: tolerance(2, 1e-9),
      onStep: (t) => t > 1,
    })
    expect(asked).toMatchObject({ ok: true, ended: 'asked' })
  })
})

test('the implicit pair follows a slow mode past a fast one in few steps', () => {
  // x' = -x, z' = -1e6 (z - x²): z = x² / (1 - 2e-6) on the slow manifold
  const f = (y: Float64Array, out: Float64Array) => {
    const [x = 0, z = 0] = y
    out[0] = -x
    out[1] = -1e6 * (z - x * x)
  }
  const linearise = (y: Float64Array, out: Float64Array, j: Float64Array) => {
    f(y, out)
    j.set([-1, 0, 2e6 * (y[0] ?? 0), -1e6])
  }
  const result = integrateStiff(f, linearise, Float64Array.of(1, 5), {
    span: 3,
    relative: 1e-5,
    absolute: tolerance(2, 1e-8),
  })
  if (!result.ok) throw new Error(result.reason)
  // an explicit method needs about a million
  expect(result.steps).toBeLessThan(3000)
  expect(result.y[0]).toBeCloseTo(Math.exp(-3), 4)
  expect(result.y[1]).toBeCloseTo(Math.exp(-6), 4)
})
