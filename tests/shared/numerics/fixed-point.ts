/**
 * Reference values for the tests of proved bounds: real numbers as integers times 2^-1200, elementary functions to about
 * 1150 bits by series that have nothing in common with the code under test.
 */

const bits = 1200n
export const one = 1n << bits

/** The exact value of a double. */
export function exact(d: number): bigint {
  const view = new DataView(new ArrayBuffer(8))
  view.setFloat64(0, d)
  const word = view.getBigUint64(0)
  const exponent = (word >> 52n) & 0x7ffn
  const fraction = word & 0xfffffffffffffn
  const mantissa = exponent === 0n ? fraction : fraction | 0x10000000000000n
  const shift = bits - 1074n + (exponent === 0n ? 0n : exponent - 1n)
  const size = mantissa << shift
  return word >> 63n ? -size : size
}

export const mul = (a: bigint, b: bigint): bigint => (a * b) >> bits
export const div = (a: bigint, b: bigint): bigint => (a << bits) / b
export const abs = (a: bigint): bigint => (a < 0n ? -a : a)

export function sqrt(a: bigint): bigint {
  if (a === 0n) return 0n
  const target = a << bits
  let x = 1n << BigInt(Math.ceil(target.toString(2).length / 2) + 1)
  for (;;) {
    const next = (x + target / x) >> 1n
    if (next >= x) return x
    x = next
  }
}

/** Sum of x^(2k+1)/(2k+1) with the given sign between terms, for x = 1/q. */
function inverseSeries(q: bigint, sign: 1n | -1n): bigint {
  let power = one / q
  let sum = power
  for (let k = 3n, s = sign; power !== 0n; k += 2n, s *= sign) {
    power /= q * q
    sum += (s * power) / k
  }
  return sum
}

export const ln2 = 2n * inverseSeries(3n, 1n)
export const pi = 16n * inverseSeries(5n, -1n) - 4n * inverseSeries(239n, -1n)

const round = (a: bigint): bigint => (a + one / 2n) >> bits

export function exp(x: bigint): bigint {
  const k = round(div(x, ln2))
  let term = one
  let sum = one
  const r = (x - k * ln2) >> 20n
  for (let n = 1n; term !== 0n && term !== -1n; n++) {
    term = mul(term, r) / n
    sum += term
  }
  for (let i = 0; i < 20; i++) sum = mul(sum, sum)
  return k >= 0n ? sum << k : sum >> -k
}

export function log(x: bigint): bigint {
  const length = BigInt(x.toString(2).length) - 1n
  const k = length - bits
  const m = k >= 0n ? x >> k : x << -k
  let y = exact(Math.log(Number(m >> (bits - 60n)) / 2 ** 60))
  for (let i = 0; i < 6; i++) {
    const e = exp(y)
    y += div(2n * (m - e), m + e)
  }
  return y + k * ln2
}

/** [sin x, cos x] */
export function circular(x: bigint): [bigint, bigint] {
  const quarter = pi / 2n
  const k = round(div(x, quarter))
  const r = x - k * quarter
  const square = mul(r, r)
  let sinTerm = r
  let cosTerm = one
  let sin = r
  let cos = one
  for (let n = 1n; n < 200n; n++) {
    cosTerm = -mul(cosTerm, square) / ((2n * n - 1n) * (2n * n))
    sinTerm = -mul(sinTerm, square) / (2n * n * (2n * n + 1n))
    cos += cosTerm
    sin += sinTerm
  }
  const turns = ((k % 4n) + 4n) % 4n
  if (turns === 0n) return [sin, cos]
  if (turns === 1n) return [cos, -sin]
  if (turns === 2n) return [-sin, -cos]
  return [-cos, sin]
}

export function atan(x: bigint): bigint {
  let y = exact(Math.atan(toNumber(x)))
  for (let i = 0; i < 7; i++) {
    const [s, c] = circular(y)
    y += div(mul(x, c) - s, mul(x, s) + c)
  }
  return y
}

/** Nearest double, or close to it. */
export function toNumber(a: bigint): number {
  const size = abs(a)
  if (size === 0n) return 0
  const length = BigInt(size.toString(2).length)
  const shift = length - 60n
  const top = Number(shift >= 0n ? size >> shift : size << -shift)
  const value = top * 2 ** Number(shift - bits + 600n) * 2 ** -600
  return a < 0n ? -value : value
}
