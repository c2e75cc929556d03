import katex from 'katex'
import { describe, expect, test } from 'vitest'
import { blockToTex, longestTex } from '#shared/model/tex.ts'
import { symbolTex } from '#shared/model/tex-symbol.ts'

const tables = (equations: string) => ({
  equations,
  parameters: ['mu', 'ω₀', 'gNa', 'K', 'lambda1', 'Δx', 'k_ref', 'é', 'Α', 'Řad'].map((symbol) => ({ symbol })),
  states: ['x', 'y_1', 'θ'].map((symbol) => ({ symbol })),
})
const texOf = (right: string) => blockToTex(tables(`dx/dt = ${right}`))[0]?.tex
const typeset = (tex: string) => katex.renderToString(tex, { strict: 'error', trust: false, throwOnError: true })

test.each([
  ['x', 'x'],
  ['x1', 'x_{1}'],
  ['x_0', 'x_{0}'],
  ['x₁', 'x_{1}'],
  ['omega0', '\\omega_{0}'],
  ['ω₀', '\\omega_{0}'],
  ['μ', '\\mu'],
  ['phi', '\\phi'],
  ['epsilon', '\\varepsilon'],
  ['Omega', '\\Omega'],
  ['Α', '\\mathrm{A}'],
  ['gNa', '\\mathit{gNa}'],
  ['k_ref', 'k_{\\mathrm{ref}}'],
  ['k_phi', 'k_{\\phi}'],
  ['a_b_2', 'a_{b,2}'],
  ['Δx', '\\Delta x'],
  ['a1b', '\\mathit{a1b}'],
  ['é', '\\text{é}'],
])('the symbol %s is set as %s', (symbol, tex) => {
  expect(symbolTex(symbol)).toBe(tex)
  typeset(tex)
})

test.each([
  ['x/mu', '\\frac{x}{\\mu}'],
  ['(x + 1)/(x - 1)', '\\frac{x + 1}{x - 1}'],
  ['x^2', 'x^{2}'],
  ['-x^2', '-x^{2}'],
  ['(-x)^2', '\\left(-x\\right)^{2}'],
  ['x^-mu', 'x^{-\\mu}'],
  ['(x/K)^2', '\\left(\\frac{x}{K}\\right)^{2}'],
  ['mu*x', '\\mu \\, x'],
  ['2*x', '2 \\, x'],
  ['x*2', 'x \\cdot 2'],
  ['2*3', '2 \\cdot 3'],
  ['x - (mu - K)', 'x - \\left(\\mu - K\\right)'],
  ['x - mu - K', 'x - \\mu - K'],
  ['x*(mu + K)', 'x \\, \\left(\\mu + K\\right)'],
  ['x + -K', 'x + \\left(-K\\right)'],
  ['x*-K', 'x \\, \\left(-K\\right)'],
  ['--x', '-\\left(-x\\right)'],
  ['sin(x)^2', '\\left(\\sin\\left(x\\right)\\right)^{2}'],
  ['sqrt(x)', '\\sqrt{x}'],
  ['abs(x)', '\\left|x\\right|'],
  ['log(x)', '\\ln\\left(x\\right)'],
  ['exprel(x)', '\\operatorname{exprel}\\left(x\\right)'],
  ['max(x, K)', '\\max\\left(x, K\\right)'],
  ['1e-7*x', '1 \\cdot 10^{-7} \\, x'],
  ['1e-7^2', '\\left(1 \\cdot 10^{-7}\\right)^{2}'],
  ['pi*e', '\\pi \\, \\mathrm{e}'],
  ['omega_0', undefined],
  ['omega0*theta', '\\omega_{0} \\, \\theta'],
])('%s', (right, tex) => {
  expect(texOf(right)).toBe(tex === undefined ? null : `\\dot{x} = ${tex}`)
})

test('rates carry a dot over the letter, helpers none', () => {
  const lines = blockToTex(tables('h2 = x\ndy_1/dt = h2\ndtheta/dt = mu'))
  expect(lines.map((line) => line.tex)).toEqual(['h_{2} = x', '\\dot{y}_{1} = h_{2}', '\\dot{\\theta} = \\mu'])
})

test('comments, continuation lines and lines that cannot be read keep their place', () => {
  const lines = blockToTex(tables('# title\n\nh = x + # first\n  mu   # second\nh2 = nope\ndx/dt = h\n#\n# end'))
  expect(lines).toEqual([
    { line: 1, kind: 'comment', tex: null, text: 'title', comment: null },
    { line: 3, kind: 'helper', tex: 'h = x + \\mu', text: 'h = x +\nmu', comment: 'first second' },
    { line: 5, kind: 'unread', tex: null, text: 'h2 = nope', comment: null },
    { line: 6, kind: 'equation', tex: '\\dot{x} = h', text: 'dx/dt = h', comment: null },
    { line: 8, kind: 'comment', tex: null, text: 'end', comment: null },
  ])
})

describe('bounds', () => {
  const fraction = (depth: number) => `${'1/('.repeat(depth)}x${')'.repeat(depth)}`
  test('what nests deeper than 32 or is longer than 4 KB is shown as typed', () => {
    expect(texOf(fraction(32))).toMatch(/^\\dot/)
    expect(texOf(fraction(33))).toBe(null)
    expect(texOf('x*'.repeat(900).concat('x'))).toBe(null)
    expect(texOf('x+'.repeat(900).concat('x'))?.length).toBeLessThanOrEqual(longestTex)
    expect(texOf('x-('.repeat(150).concat('x', ')'.repeat(150)))).toBe(null)
    expect(texOf(`${'-'.repeat(150)}x`)).toBe(null)
  })

  test('everything that is given is accepted by the typesetter in its strictest setting', () => {
    const rights = [
      fraction(32),
      'gNa*lambda1^2 - Δx/k_ref + é*Α*Řad',
      'x + '.repeat(600).concat('x'),
      'exp(-(x - mu)^2/(2*K^2))',
    ]
    for (const right of rights) {
      const tex = texOf(right)
      expect(tex).toMatch(/^\\dot/)
      expect(typeset(tex ?? '')).toContain('katex')
    }
  })
})
