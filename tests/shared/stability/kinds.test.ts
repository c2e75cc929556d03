import { expect, test } from 'vitest'
import { kindOf } from '#shared/stability/kinds.ts'
import { createSpectra, isStable, spectrumOf } from '#shared/stability/spectrum.ts'

function judge(...entries: number[]) {
  const n = Math.sqrt(entries.length)
  const jacobian = Float64Array.from(entries)
  const spectrum = spectrumOf(createSpectra(n), jacobian)
  if (!spectrum) throw new Error('no eigenvalues')
  return [kindOf(spectrum, jacobian), isStable(spectrum)]
}

// eigenvalues read off triangular or rotation blocks
test.each([
  ['-0.5 ± i', [-0.5, -1, 1, -0.5], 'stable spiral', true],
  ['0.5 ± i', [0.5, -1, 1, 0.5], 'unstable spiral', false],
  ['-1, -2', [-1, 1, 0, -2], 'stable node', true],
  ['1, 2', [1, 1, 0, 2], 'unstable node', false],
  ['-1, -1, one direction', [-1, 1, 0, -1], 'stable node', true],
  ['-1, -1, every direction', [-1, 0, 0, -1], 'stable star', true],
  ['2, 2, every direction', [2, 0, 0, 2], 'unstable star', false],
  ['1, -1', [1, 0, 0, -1], 'saddle', false],
  ['±i', [0, -1, 1, 0], 'centre', false],
  ['0, -1', [0, 0, 0, -1], 'degenerate', false],
  ['1, -0.5 ± i', [1, 0, 0, 0, -0.5, -1, 0, 1, -0.5], 'saddle-focus', false],
  ['-3, -0.5 ± i', [-3, 0, 0, 0, -0.5, -1, 0, 1, -0.5], 'stable spiral', true],
  ['-3, ±i', [-3, 0, 0, 0, 0, -1, 0, 1, 0], 'degenerate', false],
  // judged by its own size: a slow mode of 1e-6 beside one of 1e6 is stable, not zero
  ['-1e-6, -1e6', [-1e-6, 1, 0, -1e6], 'stable node', true],
  ['-1e-7 ± i: below -1e-9 of its modulus', [-1e-7, -1, 1, -1e-7], 'stable spiral', true],
  ['-1e-10 ± i: not told from the axis', [-1e-10, -1, 1, -1e-10], 'centre', false],
] as const)('%s', (_, entries, kind, stable) => {
  expect(judge(...entries)).toEqual([kind, stable])
})
