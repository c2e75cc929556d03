import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { formatFrequency, formatNumber, roundTo } from '#shared/stability/numbers.ts'

describe('rounding to the safe side', () => {
  test.each([
    [7.1083, 3, 'down', '7.10'],
    [6.918, 3, 'down', '6.91'],
    [6.918, 2, 'down', '6.9'],
    [38.43, 3, 'up', '38.5'],
    [24.736842105263158, 4, 'down', '24.73'],
    [-7.1083, 3, 'down', '\u22127.11'],
    [-7.1083, 3, 'up', '\u22127.10'],
    [9.999, 3, 'up', '10.0'],
    [58, 3, 'down', '58.0'],
    [57.99999999999, 3, 'down', '58.0'],
    [59030.48, 3, 'down', '59000'],
    [1.6e-6, 2, 'nearest', '1.6 × 10⁻⁶'],
    [16292629, 3, 'nearest', '1.63 × 10⁷'],
    [1000, 2, 'nearest', '1000'],
    [0.001, 2, 'nearest', '0.0010'],
  ] as const)('%s to %s digits, %s: %s', (value, digits, rounding, text) => {
    expect(formatNumber(value, { digits, rounding })).toBe(text)
  })

  test('never crosses to the other side by more than rounding, nor moves by more than one step', () => {
    const value = fc.double({ min: 1e-8, max: 1e8, noNaN: true })
    fc.assert(
      fc.property(value, fc.boolean(), fc.integer({ min: 1, max: 8 }), (size, negative, digits) => {
        const v = negative ? -size : size
        const down = roundTo(v, digits, 'down')
        const up = roundTo(v, digits, 'up')
        const step = 10 ** (Math.floor(Math.log10(size)) + 1 - digits)
        expect(down).toBeLessThanOrEqual(v + 1e-8 * size)
        expect(up).toBeGreaterThanOrEqual(v - 1e-8 * size)
        expect(up - down).toBeLessThanOrEqual(
          1.0001 * step * 10 ** (Math.abs(up) >= 10 ** (Math.floor(Math.log10(size)) + 1) ? 1 : 0),
        )
      }),
      { seed: 11 },
    )
  })

  test('rounding noise of the range is zero, and zero has no sign', () => {
    expect(formatNumber(-8e-33, { digits: 4, noise: 1e-9 })).toBe('0')
    expect(formatNumber(-0, { digits: 4 })).toBe('0')
  })

  test("the reader's decimal mark", () => {
    expect(formatNumber(-7.1083, { digits: 3, decimalMark: ',' })).toBe('\u22127,11')
  })
})

test('frequencies in hertz where the time unit is known, else per time unit', () => {
  const omega = 2 * Math.PI * 3
  expect(formatFrequency(omega, 's', { digits: 3 })).toBe('3.00 Hz')
  expect(formatFrequency(omega, 'min', { digits: 3 })).toBe('0.0500 Hz')
  expect(formatFrequency(omega, 'h', { digits: 3 })).toBe('0.000833 Hz')
  expect(formatFrequency(omega, null, { digits: 3 })).toBe('3.00 per time unit')
  expect(formatFrequency(omega, 'toString', { digits: 3 })).toBe('3.00 per toString')
})
