import { utf8Bytes } from './utf8.ts'

// Section 4.2.2: the first 32 bits of the fractional parts of the cube roots of the first 64 primes.
const roundConstants = new Uint32Array([
  0x428a2f98, 0x71374491, 0xb5c0fbcf, 0xe9b5dba5, 0x3956c25b, 0x59f111f1, 0x923f82a4, 0xab1c5ed5, 0xd807aa98,
  0x12835b01, 0x243185be, 0x550c7dc3, 0x72be5d74, 0x80deb1fe, 0x9bdc06a7, 0xc19bf174, 0xe49b69c1, 0xefbe4786,
  0x0fc19dc6, 0x240ca1cc, 0x2de92c6f, 0x4a7484aa, 0x5cb0a9dc, 0x76f988da, 0x983e5152, 0xa831c66d, 0xb00327c8,
  0xbf597fc7, 0xc6e00bf3, 0xd5a79147, 0x06ca6351, 0x14292967, 0x27b70a85, 0x2e1b2138, 0x4d2c6dfc, 0x53380d13,
  0x650a7354, 0x766a0abb, 0x81c2c92e, 0x92722c85, 0xa2bfe8a1, 0xa81a664b, 0xc24b8b70, 0xc76c51a3, 0xd192e819,
  0xd6990624, 0xf40e3585, 0x106aa070, 0x19a4c116, 0x1e376c08, 0x2748774c, 0x34b0bcb5, 0x391c0cb3, 0x4ed8aa4a,
  0x5b9cca4f, 0x682e6ff3, 0x748f82ee, 0x78a5636f, 0x84c87814, 0x8cc70208, 0x90befffa, 0xa4506ceb, 0xbef9a3f7,
  0xc67178f2,
])
// Section 5.3.3.
const initial = [0x6a09e667, 0xbb67ae85, 0x3c6ef372, 0xa54ff53a, 0x510e527f, 0x9b05688c, 0x1f83d9ab, 0x5be0cd19]

const rotate = (x: number, by: number) => (x >>> by) | (x << (32 - by))

/**
 * SHA-256 of bytes, or of the UTF-8 form of a text, as 64 lower-case hexadecimal digits.
 * Source: FIPS 180-4 (2015), sections 5 and 6.2. Pure, because the page may be served where the browser has no digest.
 */
export function sha256(message: Uint8Array | string): string {
  const bytes = typeof message === 'string' ? utf8Bytes(message) : message
  // 5.1.1: one bit 1, zeros, the length in bits as 64 bits, together a multiple of 64 bytes.
  const padded = new Uint8Array(Math.ceil((bytes.length + 9) / 64) * 64)
  padded.set(bytes)
  padded[bytes.length] = 0x80
  const view = new DataView(padded.buffer)
  view.setUint32(padded.length - 8, Math.floor(bytes.length / 0x20000000))
  view.setUint32(padded.length - 4, (bytes.length << 3) >>> 0)

  const hash = Uint32Array.from(initial)
  const w = new Uint32Array(64)
  for (let block = 0; block < padded.length; block += 64) compress(hash, w, view, block)
  return [...hash].map((word) => word.toString(16).padStart(8, '0')).join('')
}

// 6.2.2, steps 1 to 4, for one block.
function compress(hash: Uint32Array, w: Uint32Array, view: DataView, block: number): void {
  for (let t = 0; t < 16; t++) w[t] = view.getUint32(block + 4 * t)
  for (let t = 16; t < 64; t++) {
    const w15 = w[t - 15] ?? 0
    const w2 = w[t - 2] ?? 0
    const s0 = rotate(w15, 7) ^ rotate(w15, 18) ^ (w15 >>> 3)
    const s1 = rotate(w2, 17) ^ rotate(w2, 19) ^ (w2 >>> 10)
    w[t] = s1 + (w[t - 7] ?? 0) + s0 + (w[t - 16] ?? 0)
  }
  let [a = 0, b = 0, c = 0, d = 0, e = 0, f = 0, g = 0, h = 0] = hash
  for (let t = 0; t < 64; t++) {
    const sum1 = rotate(e, 6) ^ rotate(e, 11) ^ rotate(e, 25)
    const choice = (e & f) ^ (~e & g)
    const t1 = (h + sum1 + choice + (roundConstants[t] ?? 0) + (w[t] ?? 0)) | 0
    const sum0 = rotate(a, 2) ^ rotate(a, 13) ^ rotate(a, 22)
    const majority = (a & b) ^ (a & c) ^ (b & c)
    const t2 = (sum0 + majority) | 0
    h = g
    g = f
    f = e
    e = (d + t1) | 0
    d = c
    c = b
    b = a
    a = (t1 + t2) | 0
  }
  const added = [a, b, c, d, e, f, g, h]
  for (let i = 0; i < 8; i++) hash[i] = (hash[i] ?? 0) + (added[i] ?? 0)
}
