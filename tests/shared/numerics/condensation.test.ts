import { describe, expect, test } from 'vitest'
import { condenseBlock, createCondensed, solveCondensed } from '#shared/numerics/condensation.ts'
import { solveLinear } from '#shared/numerics/linear-solve.ts'

/** The same numbers in every run, in [-1, 1]. */
function numbers(seed: number): () => number {
  let state = seed
  return () => {
    state = (state * 1103515245 + 12345) % 2147483648
    return state / 1073741824 - 1
  }
}

describe.each([
  [1, 1],
  [2, 1],
  [2, 5],
  [3, 4],
])('%d states on %d intervals', (n, count) => {
  const ws = createCondensed(n, count + 1)
  const { rows, cols, blocks } = ws
  const inner = 3 * n
  const next = numbers(7 * n + count)
  for (let k = 0; k < count * rows * cols; k++) blocks[k] = next()
  const filled = blocks.slice()
  // the whole system with the last node identified with the first: 4 n per interval, two parameters
  const size = 4 * n * count + 2
  const dense = new Float64Array(size * size)
  const right = [new Float64Array(size), new Float64Array(size)] as const
  for (let j = 0; j < count; j++) {
    for (let r = 0; r < rows; r++) {
      const row = r < 4 * n ? 4 * n * j + r : size - 2 + (r - 4 * n)
      const from = (j * rows + r) * cols
      const add = (column: number, value: number): void => {
        dense[row * size + column] = (dense[row * size + column] as number) + value
      }
      for (let c = 0; c < inner; c++) add(4 * n * j + n + c, filled[from + c] as number)
      for (let c = 0; c < n; c++) {
        add(4 * n * j + c, filled[from + inner + c] as number)
        add(j + 1 === count ? c : 4 * n * (j + 1) + c, filled[from + inner + n + c] as number)
      }
      add(size - 2, filled[from + inner + 2 * n] as number)
      add(size - 1, filled[from + inner + 2 * n + 1] as number)
      for (const side of [0, 1] as const) {
        right[side][row] = (right[side][row] as number) + (filled[from + inner + 2 * n + 2 + side] as number)
      }
    }
  }

  test('gives the solution of the whole system, for both right-hand sides', () => {
    for (let j = 0; j < count; j++) expect(condenseBlock(ws, j)).toBe(true)
    expect(solveCondensed(ws, count)).toBe(true)
    for (const side of [0, 1] as const) {
      const whole = solveLinear(dense, right[side])
      const got = [...ws.values[side].slice(0, size - 2), ...ws.parameters[side]]
      got.forEach((value, i) => {
        expect(value).toBeCloseTo(whole?.[i] ?? Number.NaN, 8)
      })
      // the last node repeats the first
      expect(ws.values[side].slice(size - 2, size - 2 + n)).toEqual(ws.values[side].slice(0, n))
    }
  })
})

test('a singular block and a value that is not finite are told, not divided by', () => {
  const ws = createCondensed(2, 1)
  expect(condenseBlock(ws, 0)).toBe(false)
  ws.blocks.fill(Number.NaN)
  expect(condenseBlock(ws, 0)).toBe(false)
})
