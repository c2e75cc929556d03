import { describe, expect, test } from 'vitest'
import { analyse } from '#shared/stability/card.ts'
import { verdictWords } from '#shared/stability/sentences.ts'
import { documentOf, normalForm, type ShortModel } from './documents.ts'

function words(model: ShortModel, extra: Record<string, unknown> = {}) {
  const base = documentOf(model)
  const unit = extra.unit
  const [control, ...others] = base.parameters
  const parameters = unit === undefined ? base.parameters : [{ ...control, unit }, ...others]
  const { unit: _unit, ...rest } = extra
  const document = { ...base, parameters, ...rest }
  const result = analyse(document, { parts: ['steady', 'hopf'] })
  if (!result.ok) throw new Error(JSON.stringify(result.errors))
  // the document was accepted, so that its parameters carry what the words read of them
  const page = {
    ...document,
    parameters: parameters.map((row) => ({ symbol: '', value: 0, ...row, unit: String(unit ?? '') })),
  }
  return verdictWords(result.card, page)
}

const hard: ShortModel = {
  ...normalForm,
  equations: 'q2 = x^2+y^2\ng = (v - 7.1083)/10 + q2 - q2^2\ndx/dt = g*x - 14.6*y\ndy/dt = 14.6*x + g*y',
  control: { v: [5, 2, 12] },
}

describe('without cycles', () => {
  test('hard: rounded down where the danger is above, frequency in hertz, nothing promised', () => {
    const said = words(hard, { timeUnit: 's', unit: 'm/s', quietWord: 'Runs straight' })
    expect(said).toMatchObject({ kind: 'hard', glyph: 'hard' })
    expect(said.headline).toEqual({ kindWord: 'Hard', rest: 'onset at 7.108 m/s' })
    expect(said.sentence).toBe(
      'Runs straight up to 7.108 m/s, then swings at 2.32 Hz. Jumps; how far, and where it comes back, is not computed yet.',
    )
    expect(said.live).toBe(`Hard onset at 7.108 m/s. ${said.sentence}`)
  })

  test('soft, falling: rounded up where the danger is below', () => {
    const said = words({
      ...normalForm,
      equations: 'g = 0.038432 - v0\ndx/dt = g*x - y - x*(x^2+y^2)\ndy/dt = x + g*y - y*(x^2+y^2)',
      control: { v0: [0.05, 0.008, 0.09] },
    })
    expect(said.headline).toEqual({ kindWord: 'Soft', rest: 'onset at 0.03844' })
    expect(said.sentence).toBe(
      'Steady down to 0.03844, then swings at 0.159 per time unit. Grows gradually at first; what happens further on is not computed yet.',
    )
  })

  test('two onsets that enclose the running point', () => {
    const said = words({
      ...normalForm,
      equations: 'g = (mu-2)^2 - 0.1\ndx/dt = g*x - y - x*(x^2+y^2)\ndy/dt = x + g*y - y*(x^2+y^2)',
      control: { mu: [2, 1, 3] },
    })
    // 2 ± sqrt(0.1) = 1.68377, 2.31623: up below, down above
    expect(said.headline).toEqual({ kindWord: 'Soft', rest: 'onset above 2.316 and below 1.684' })
    expect(said.sentence).toMatch(
      /^Steady between 1\.684 and 2\.316\. Above: swings at 0\.159 per time unit; grows gradually/,
    )
  })

  test('no onset in the range', () => {
    const said = words({ ...normalForm, control: { mu: [-0.5, -1, -0.2] } })
    expect(said).toMatchObject({
      kind: 'none',
      headline: { kindWord: 'No onset', rest: 'between \u22121.000 and \u22120.2000' },
    })
  })

  test('undecided where the verdict is withheld', () => {
    const said = words({
      ...normalForm,
      equations: 'q4 = (x^2+y^2)^2\ndx/dt = mu*x - y - x*q4\ndy/dt = x + mu*y - y*q4',
    })
    expect(said).toMatchObject({ kind: 'undecided', glyph: 'open', headline: { kindWord: 'Undecided', rest: 'at 0' } })
  })

  test('a turning point is a limit of its own', () => {
    const said = words({
      ...normalForm,
      equations: 'dx/dt = mu + x - x^3\ndy/dt = -y',
      states: { x: [-2, 2, -1], y: [-1, 1] },
    })
    expect(said).toMatchObject({ kind: 'limit', headline: { kindWord: 'Turning point', rest: 'at 0.3849' } })
    expect(said.sentence).toBe('Steady up to 0.3849. The steady state ends there; where it goes is not computed yet.')
  })

  test('already unstable: never an onset as the limit where nothing stable is lost', () => {
    const said = words({ ...normalForm, control: { mu: [0.5, -1, 1] } })
    expect(said).toMatchObject({ kind: 'unstable', headline: { kindWord: 'Already unstable', rest: 'above 0' } })
    const everywhere = words({
      ...normalForm,
      equations: `${normalForm.equations}\ndz/dt = z`,
      states: { ...normalForm.states, z: [-1, 1] },
    })
    expect(everywhere.headline).toEqual({ kindWord: 'Already unstable', rest: 'at \u22120.5000' })
  })

  test('no steady state, and a running point outside the range', () => {
    const none = words({ ...normalForm, equations: 'dx/dt = 1 + x^2 + mu^2\ndy/dt = -y' })
    expect(none.headline).toEqual({ kindWord: 'No steady state', rest: 'at \u22120.5000' })
    expect(words({ ...normalForm, control: { mu: [-3, -1, 1] } }).headline.kindWord).toBe('Undecided')
  })

  test('no word of coming back is ever said', () => {
    const all = [normalForm, hard, { ...normalForm, control: { mu: [0.5, -1, 1] } } as ShortModel].map(
      (model) => words(model).live,
    )
    for (const text of all) expect(text).not.toMatch(/at once|recovers|any size/i)
  })
})
