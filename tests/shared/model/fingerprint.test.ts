import { createHash } from 'node:crypto'
import { describe, expect, test } from 'vitest'
import { canonicalJson } from '#shared/model/canonical-json.ts'
import { fingerprint } from '#shared/model/fingerprint.ts'
import { sha256 } from '#shared/model/sha256.ts'
import { utf8Bytes, utf8Length } from '#shared/model/utf8.ts'
import { sampleModel } from './sample-model.ts'

describe('SHA-256', () => {
  // Examples of FIPS 180-4 (NIST, "Examples with intermediate values", SHA256.pdf), from memory; the digests are
  // checked against the platform's own below.
  test.each([
    ['abc', 'ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad'],
    ['', 'e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855'],
    [
      'abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq',
      '248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1',
    ],
    ['a'.repeat(1_000_000), 'cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0'],
  ])('%#', (text, digest) => {
    expect(sha256(text)).toBe(digest)
  })

  test('agrees with the platform at every length around the block size', () => {
    for (let length = 0; length <= 260; length++) {
      const bytes = Uint8Array.from({ length }, (_, i) => (i * 37 + length) % 256)
      expect(sha256(bytes)).toBe(createHash('sha256').update(bytes).digest('hex'))
    }
  })
})

test('UTF-8 agrees with the platform, surrogate pairs and halves included', () => {
  for (const text of ['', 'abc', 'µφ', '€', '😀', 'a😀b\ud800c\udc00', '\u07ff\u0800\uffff\u{10ffff}']) {
    expect([...utf8Bytes(text)]).toEqual([...new TextEncoder().encode(text)])
    expect(utf8Length(text)).toBe(new TextEncoder().encode(text).length)
  }
})

describe('canonical JSON', () => {
  // RFC 8785, sections 3.2.2 and 3.2.4 (from memory): the sample and its canonical form.
  test('the sample of the RFC', () => {
    const sample: unknown = JSON.parse(
      '{"numbers":[333333333.33333329,1E30,4.50,2e-3,0.000000000000000000000000001],' +
        '"string":"\\u20ac$\\u000F\\u000aA\'\\u0042\\u0022\\u005c\\\\\\"\\/","literals":[null,true,false]}',
    )
    expect(canonicalJson(sample)).toBe(
      '{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\\u000f\\nA\'B\\"\\\\\\\\\\"/"}',
    )
  })

  // RFC 8785, section 3.2.3 (from memory): names are sorted by UTF-16 code units.
  test('sorts names by code units', () => {
    const sample = { '\u20ac': 1, '\r': 2, '\ufb33': 3, '1': 4, '\ud83d\ude00': 5, '\u0080': 6, '\u00f6': 7 }
    expect(canonicalJson(sample)).toBe('{"\\r":2,"1":4,"\u0080":6,"ö":7,"€":1,"😀":5,"\ufb33":3}')
  })

  test('minus zero is 0, undefined members are absent', () => {
    expect(canonicalJson({ a: -0, b: undefined, c: [] })).toBe('{"a":0,"c":[]}')
  })

  test('throws on what JSON cannot hold', () => {
    for (const value of [Number.NaN, Number.POSITIVE_INFINITY, '\ud800', undefined, () => 1, 1n]) {
      expect(() => canonicalJson({ value: [value] })).toThrow(RangeError)
    }
  })
})

describe('fingerprint', () => {
  const document = sampleModel({ timeUnit: 's', notes: 'n', summary: 's' })
  const own = fingerprint(document)

  test('is the digest of the counted members, written out by hand', () => {
    const counted =
      '{"control":"mu","equations":"q2 = x^2 + y^2\\ndx/dt = mu*x - y - x*q2\\ndy/dt = x + mu*y - y*q2","format":"brinkbook-model","observed":"x",' +
      '"parameters":[{"high":1,"low":-1,"symbol":"mu","unit":"1","value":-0.5}],' +
      '"states":[{"high":2,"low":-2,"start":0.1,"symbol":"x","unit":"1"},{"high":2,"low":-2,"start":0.1,"symbol":"y","unit":"1"}],' +
      '"timeUnit":"s","version":1}'
    expect(own).toBe(`sha256:${createHash('sha256').update(counted).digest('hex')}`)
  })

  test('does not see titles, meanings, citations, notes, the order of members or the kind of line ends', () => {
    const [first] = document.parameters
    const other = {
      ...document,
      title: 'another',
      notes: undefined,
      citations: [{ id: 'a' }],
      leftOut: ['b'],
      equations: document.equations.replaceAll('\n', '\r\n'),
      parameters: [{ meaning: 'm', citations: ['a'], unit: first?.unit, high: 1, low: -1, value: -0.5, symbol: 'mu' }],
    }
    expect(fingerprint(other)).toBe(own)
  })

  test('sees everything a card depends on', () => {
    const [mu] = document.parameters
    const [x, y] = document.states
    if (!mu || !x || !y) throw new Error('sample changed')
    const changed = [
      { ...document, timeUnit: undefined },
      { ...document, equations: `${document.equations} ` },
      { ...document, parameters: [{ ...mu, value: -0.25 }] },
      { ...document, parameters: [{ ...mu, low: -2 }] },
      { ...document, parameters: [{ ...mu, unit: undefined }] },
      { ...document, parameters: [{ ...mu, uncertainty: { kind: 'normal' as const, sd: 1 } }] },
      { ...document, states: [y, x] },
      { ...document, states: [{ ...x, start: 0.2 }, y] },
      { ...document, secondControl: 'k' },
      { ...document, observed: 'y' },
    ].map(fingerprint)
    expect(new Set([own, ...changed]).size).toBe(changed.length + 1)
  })
})
