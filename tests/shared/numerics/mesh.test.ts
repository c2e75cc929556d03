import { describe, expect, test } from 'vitest'
import {
  basisAt,
  basisSlopeAt,
  degree,
  fourthDerivative,
  gaussPoints,
  nodes,
  nodeWeights,
} from '#shared/numerics/gauss-collocation.ts'
import { equidistributed, errorDensity, transfer, uniformMesh, valueAt } from '#shared/numerics/mesh.ts'

const polynomial = (s: number): number => 1 + s * (2 + s * (-3 + s * (0.5 + s * 4)))
const slope = (s: number): number => 2 + s * (-6 + s * (1.5 + s * 16))

test('the basis reproduces a polynomial of degree four, its slope and its fourth derivative', () => {
  const values = Array.from({ length: nodes }, (_, k) => polynomial(k / degree))
  const basis = new Float64Array(nodes)
  const combine = (): number => values.reduce((sum, value, k) => sum + value * (basis[k] as number), 0)
  for (const s of [0, 0.1, 0.37, 0.5, 0.93, 1]) {
    basisAt(s, basis)
    expect(combine()).toBeCloseTo(polynomial(s), 13)
    basisSlopeAt(s, basis)
    expect(combine()).toBeCloseTo(slope(s), 12)
  }
  basis.set(fourthDerivative)
  expect(combine()).toBeCloseTo(96, 11)
})

test('the Gauss points are the zeros of the Legendre polynomial of degree four; the node rule is exact to degree five', () => {
  for (const s of gaussPoints) {
    const x = 2 * s - 1
    expect(35 * x ** 4 - 30 * x ** 2 + 3).toBeCloseTo(0, 13)
  }
  for (let power = 0; power <= 5; power++) {
    const sum = nodeWeights.reduce((total, weight, k) => total + weight * (k / degree) ** power, 0)
    expect(sum).toBeCloseTo(1 / (power + 1), 14)
  }
})

describe('a periodic function with a steep part', () => {
  // tanh of a wide sine: steep at 0, 1/2 and 1
  const f = (t: number): number => Math.tanh(12 * Math.sin(2 * Math.PI * t))
  const on = (mesh: Float64Array): Float64Array => {
    const last = (mesh.length - 1) * degree
    return Float64Array.from({ length: last + 1 }, (_, k) => {
      const j = Math.min(Math.floor(k / degree), mesh.length - 2)
      const a = mesh[j] as number
      return f(a + ((k - j * degree) / degree) * ((mesh[j + 1] as number) - a))
    })
  }
  const worst = (mesh: Float64Array): number => {
    const u = on(mesh)
    const out = new Float64Array(1)
    let error = 0
    for (let k = 0; k < 1000; k++) {
      valueAt(mesh, u, 1, (k + 0.5) / 1000, out)
      error = Math.max(error, Math.abs((out[0] as number) - f((k + 0.5) / 1000)))
    }
    return error
  }

  test('is met ten times better by an equidistributed mesh of the same size', () => {
    let mesh = uniformMesh(40)
    const before = worst(mesh)
    for (let pass = 0; pass < 4; pass++) {
      const { density, total } = errorDensity(mesh, on(mesh), 1)
      mesh = equidistributed(mesh, density, total, 40)
    }
    expect(mesh).toHaveLength(41)
    expect([...mesh].every((t, j) => j === 0 || t > (mesh[j - 1] as number))).toBe(true)
    expect(worst(mesh)).toBeLessThan(before / 10)
  })

  test('keeps its values when it is brought to a finer mesh and back', () => {
    const coarse = uniformMesh(30)
    const u = on(coarse)
    const back = transfer(uniformMesh(60), transfer(coarse, u, 1, uniformMesh(60)), 1, coarse)
    back.forEach((value, k) => {
      expect(value).toBeCloseTo(u[k] as number, 12)
    })
  })
})
