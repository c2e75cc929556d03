import { renderToStaticMarkup } from 'react-dom/server'
import { describe, expect, test } from 'vitest'
import type { StabilityCard } from '#shared/model/card-document.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { analyse } from '#shared/stability/card.ts'
import { StabilityCardView, type StabilityCardViewProps } from '#src/features/stability-card/stability-card-view.tsx'
import { VerdictBar } from '#src/features/stability-card/verdict-bar.tsx'
import { bistable, calm, chain, lorenz, nowhere, wheelset } from '#tests/support/models.ts'
import { empty, foldedCurve, type Made, onsetOf, straight } from './cards.ts'

function computed(document: ModelDocument): Made {
  const result = analyse(document)
  if (!result.ok) throw new Error(result.errors[0]?.message)
  return { document, card: result.card }
}

function markup(
  { document, card }: { document: Made['document']; card: StabilityCard },
  more: Partial<StabilityCardViewProps> = {},
) {
  return renderToStaticMarkup(
    <StabilityCardView document={document} card={card} state="live" at={null} onAt={() => undefined} {...more} />,
  )
}

/** What a reader sees, tags taken away. */
const words = (html: string) => html.replace(/<[^>]+>/g, ' ').replace(/\s+/g, ' ')

const made: Record<string, () => Made> = {
  'Lorenz, with a pitchfork and two mirrored onsets': () => computed(lorenz),
  'a soft onset on a zero steady state': () => computed(wheelset(-0.01)),
  'a hard onset on a zero steady state': () => computed(wheelset(0.01)),
  'one state with two turning points': () => computed(bistable),
  'no steady state': () => computed(nowhere),
  'no onset': () => computed(calm),
  'thirty states': () => computed(chain(30)),
  'an undecided onset': () => straight('degenerate'),
  'a pair that is no limit': () => straight('soft', { operating: false }),
  'an amplitude too large for any drawing': () => straight('hard', { amplitudeCoefficient: 1e200 }),
  'an amplitude too small to see': () => straight('soft', { amplitudeCoefficient: 1e-200 }),
  'a folded curve': foldedCurve,
  'nothing but a warning': () => empty,
}

describe.each(Object.entries(made))('the card of %s', (_, make) => {
  const subject = make()

  test('holds no number that a browser cannot read and nothing undefined', () => {
    const html = markup(subject)
    expect(html).not.toMatch(/NaN|Infinity|undefined|null|\[object/)
  })

  test('promises nothing about what was not computed', () => {
    expect(words(markup(subject))).not.toMatch(/at once|recovers|any size/i)
  })

  test('is a named figure described by the verdict and a sentence for every curve', () => {
    const html = markup(subject)
    const figure = /<figure aria-labelledby="([^"]+)" aria-describedby="([^"]+)"/.exec(html)
    expect(figure).not.toBeNull()
    const ids = `${figure?.[1]} ${figure?.[2]}`.split(' ')
    expect(ids.length).toBeGreaterThanOrEqual(3)
    for (const id of ids) expect(html).toContain(`id="${id}"`)
  })

  test('its running point is a slider with its value in words', () => {
    const html = markup(subject)
    const slider = /<g role="slider"[^>]*>/.exec(html)?.[0] ?? ''
    expect(slider).toMatch(/tabindex="0"/i)
    expect(slider).toMatch(/aria-valuetext="[^"]+(steady state|the [a-z ]+onset|point)/)
    expect(slider).toContain('aria-valuemin=')
    expect(slider).toContain('aria-valuenow=')
  })

  test('no two of its parts share an id', () => {
    const ids = [...markup(subject).matchAll(/ id="([^"]+)"/g)].map((match) => match[1])
    expect(new Set(ids).size).toBe(ids.length)
  })

  test('draws the same twice', () => {
    expect(markup(subject)).toBe(markup(subject))
  })
})

describe('verdict and numbers', () => {
  test('the Lorenz card says hard at 24.73, the published 470/19 rounded to the safe side', () => {
    // 470/19 = 24.7368...: Lorenz 1963, section 7.
    const text = words(markup(computed(lorenz)))
    expect(text).toContain('Hard onset at 24.73')
    expect(text).toContain('Along the heating, lowest first')
    expect(text).toContain('limit of another state')
  })

  test('the first thing read is the verdict', () => {
    const html = markup(straight('hard'))
    expect(html.indexOf('Hard onset')).toBeLessThan(html.indexOf('<figure'))
  })

  test('a pair that is no limit is hollow, listed and named so', () => {
    const html = markup(straight('soft', { operating: false }))
    expect(html).toContain('aria-label="Further pair at 58.00 m/s, already unstable, not a limit"')
  })

  test('the numbers of the onset stand in the strip, with units', () => {
    const text = words(markup(straight('hard')))
    // 14.5 rad/s over 2 pi is 2.308 Hz; growth rate (55 - 58)/20; ln 2 / 0.15 = 4.62 s.
    expect(text).toMatch(/Onset 58\.00 m\/s/)
    expect(text).toMatch(/Frequency 2\.31 Hz 14\.5 rad\/s/)
    expect(text).toMatch(/Cubic coefficient \+0\.0125 mm⁻² s⁻¹/)
    expect(text).toMatch(/Crossing rate \+0\.0500 1\/s per m\/s/)
    expect(text).toMatch(/Growth rate at 55\.00 −0\.150 1\/s halves in 4\.62 s/)
  })

  test('the running point of the viewer moves what is said, not the verdict', () => {
    const text = words(markup(straight('hard'), { at: 50 }))
    expect(text).toContain('Hard onset at 58.00 m/s')
    expect(text).toContain('Growth rate at 50.00 −0.400 1/s')
    expect(text).toContain('8.00 below the hard onset')
    expect(text).toContain('Read between computed points of the branches.')
  })

  test('outside the swept range nothing is claimed', () => {
    const text = words(markup(straight('hard'), { at: 90 }))
    expect(text).toContain('outside the range that was swept')
    expect(text).toContain('Outside the range that was swept: not computed.')
    expect(text).not.toContain('None in the ranges of the states.')
  })

  test('the value is offered to be set only to who may', () => {
    const set = { at: 50, onSetValue: () => undefined }
    expect(words(markup(straight('hard'), { ...set, mayEdit: true }))).toContain('Set as the page&#x27;s value')
    expect(words(markup(straight('hard'), { ...set, mayEdit: false }))).not.toContain('Set as')
    expect(words(markup(straight('hard'), { onSetValue: set.onSetValue, at: null, mayEdit: true }))).not.toContain(
      'Set as',
    )
  })

  test('steady states computed for the running point replace those read off the branches', () => {
    const exact = {
      p: 50,
      complete: true,
      steadyStates: [
        {
          state: { y: 0, z: 0 },
          eigenvalues: [
            { re: -0.4, im: 14.5 },
            { re: -0.4, im: -14.5 },
          ],
          stable: true,
          kind: 'stable spiral' as const,
          residual: 0,
        },
      ],
    }
    const text = words(markup(straight('hard'), { at: 50, exact }))
    expect(text).toContain('stable spiral −0.400 ± 14.5i')
    expect(text).toContain('Proved: the ranges of the states hold no other.')
    // For another value they are not used.
    expect(words(markup(straight('hard'), { at: 51, exact }))).toContain('Read between computed points')
  })

  test('warnings stand with their line', () => {
    const warned = straight('soft')
    const card = { ...warned.card, warnings: [{ code: 'not-smooth' as const, line: 3, message: 'abs has a kink.' }] }
    expect(words(markup({ ...warned, card }))).toContain('Line 3: abs has a kink.')
  })
})

test('the bar that stays in sight carries glyph and headline', () => {
  const html = renderToStaticMarkup(<VerdictBar {...straight('soft')} />)
  expect(words(html)).toContain('Soft onset at 58.00 m/s')
  expect(html).toContain('text-soft')
})

describe('against an earlier revision', () => {
  const earlier = { ...straight('soft'), label: 'revision 1.5.0' }

  test('another kind is told, and the numbers say what they were', () => {
    const text = words(markup(straight('hard'), { earlier }))
    expect(text).toContain('Against revision 1.5.0')
    expect(text).toContain('was soft')
    expect(text).toContain('was −0.0125')
  })

  test('the same kind is not told', () => {
    expect(words(markup(straight('soft'), { earlier }))).not.toContain('was soft')
  })

  test('its curves are drawn in pencil', () => {
    expect(markup(straight('hard'), { earlier })).toContain('stroke="var(--color-pencil)" stroke-width="2.2"')
  })
})

describe('states of the card', () => {
  test('text that cannot be read: which line, and what still holds', () => {
    const html = markup(straight('hard'), {
      state: 'older',
      computedAt: '2026-12-01T09:41:00',
      errors: [{ code: 'syntax', message: 'A closing bracket is missing.', line: 7 }],
    })
    expect(words(html)).toContain('Line 7 cannot be read. The card keeps the last run that worked, 09:41.')
    expect(words(html)).toContain('A closing bracket is missing.')
    expect(words(html)).toContain('from 09:41, older')
    expect(html).toContain('card-older')
  })

  test('a run under way is said at once, and the picture is left as it is', () => {
    const html = markup(straight('hard'), { state: 'computing' })
    expect(words(html)).toContain('computing')
    expect(html).not.toContain('card-older')
  })

  test('before there is a model the card says what it needs', () => {
    const html = renderToStaticMarkup(
      <StabilityCardView document={null} card={null} state="live" at={null} onAt={() => undefined} />,
    )
    expect(words(html)).toContain('The verdict stands here')
  })

  test('trouble of the calculation itself is said', () => {
    const trouble = 'The calculation gave no answer and was started anew.'
    expect(words(markup(straight('soft'), { trouble }))).toContain(trouble)
  })
})

test('several onsets: two limits give two glyphs and one list in order', () => {
  const base = straight('soft')
  const lower = onsetOf({ p: 44, verdict: 'hard', crossing: -0.05, cycleSide: 'above' })
  const points = base.card.branches?.[0]?.points.map((point) => {
    const re = point.p < 50 ? (44 - point.p) / 20 : (point.p - 58) / 20
    const eigenvalues = point.eigenvalues.map(({ im }) => ({ re, im }))
    return { ...point, eigenvalues, stable: re < 0 }
  })
  const [branch] = base.card.branches ?? []
  if (!branch || !points) throw new Error('the fixture has a branch')
  const card: StabilityCard = {
    ...base.card,
    branches: [{ ...branch, points }],
    hopf: [lower, ...(base.card.hopf ?? [])],
    window: {
      branch: 0,
      from: 44,
      to: 58,
      low: { kind: 'onset', index: 0, verdict: 'hard' },
      high: { kind: 'onset', index: 1, verdict: 'soft' },
    },
  }
  const html = markup({ ...base, card })
  const text = words(html)
  expect(text).toContain('steady 44.00 to 58.00')
  const list = text.slice(text.indexOf('lowest first'))
  expect(list.indexOf('44.00')).toBeLessThan(list.indexOf('55.00'))
  expect(list.indexOf('55.00')).toBeLessThan(list.indexOf('58.00'))
  // Both glyphs stand beside the headline: low first.
  const head = html.slice(0, html.indexOf('<h2'))
  expect(head.indexOf('text-hard')).toBeLessThan(head.indexOf('text-soft'))
  expect(head).toContain('text-soft')
})
