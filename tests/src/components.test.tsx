import { renderToStaticMarkup } from 'react-dom/server'
import { MemoryRouter } from 'react-router-dom'
import { describe, expect, test } from 'vitest'
import { Button } from '#src/components/button.tsx'
import { EdgeStrip } from '#src/components/edge-strip.tsx'
import { Field } from '#src/components/field.tsx'
import { ModelRow } from '#src/components/model-row.tsx'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { OnsetMark } from '#src/components/onset-mark.tsx'
import { PencilLine } from '#src/components/pencil-line.tsx'
import { RevisionTriangle } from '#src/components/revision-triangle.tsx'
import { SignatureStrip, StateWord, stripStates } from '#src/components/signature-strip.tsx'
import { foldCard, hardCard, row, steadyCard, summary } from './fixtures.ts'

const inPage = (element: React.ReactElement) => renderToStaticMarkup(<MemoryRouter>{element}</MemoryRouter>)

describe('drawings', () => {
  test('an edge strip is a picture with its words as name', () => {
    const html = renderToStaticMarkup(<EdgeStrip card={summary()} />)
    expect(html).toMatch(/^<svg role="img" aria-label="running speed from 0 to 100 m\/s\. Stable from 0 to 50\./)
    expect(html).toContain('>0</text>')
    expect(html).toContain('>100</text>')
  })

  test('two strips on a screen share no pattern', () => {
    const html = renderToStaticMarkup(
      <>
        <EdgeStrip card={summary()} />
        <EdgeStrip card={hardCard} />
      </>,
    )
    const ids = [...html.matchAll(/<pattern id="([^"]+)"/g)].map((match) => match[1])
    expect(ids).toHaveLength(2)
    expect(new Set(ids).size).toBe(2)
    for (const id of ids) expect(html).toContain(`url(#${id})`)
  })

  test('no drawing carries a style attribute or a colour of its own', () => {
    const html = renderToStaticMarkup(<EdgeStrip card={hardCard} faded />)
    expect(html).not.toContain('style=')
    expect(html).not.toMatch(/#[0-9a-f]{3,6}"/i)
  })

  test('onset marks face the fall: a falling onset is mirrored', () => {
    const rising = renderToStaticMarkup(<OnsetMark x={10} y={5} kind="hard" />)
    const falling = renderToStaticMarkup(<OnsetMark x={10} y={5} kind="hard" mirrored />)
    expect(rising).toContain('translate(10 5) scale(1 1)')
    expect(falling).toContain('translate(10 5) scale(-1 1)')
    expect(renderToStaticMarkup(<OnsetMark x={0} y={0} kind="soft" hollow />)).toContain('stroke="var(--color-soft)"')
  })

  test('glyphs are decoration beside their word', () => {
    for (const kind of ['hard', 'soft', 'undecided', 'none', 'split'] as const) {
      expect(renderToStaticMarkup(<OnsetGlyph kind={kind} />)).toContain('aria-hidden="true"')
    }
  })

  test('each of the eight states has a strip of its own, named where it stands alone', () => {
    const strips = stripStates.map((state) => renderToStaticMarkup(<SignatureStrip state={state} />))
    expect(new Set(strips.map((strip) => strip.replace(/aria-label="[^"]*"/, ''))).size).toBe(stripStates.length)
    expect(renderToStaticMarkup(<SignatureStrip state="in-force" named />)).toContain('aria-label="In force"')
    expect(renderToStaticMarkup(<StateWord state="in-review" />)).toContain('In review')
  })

  test('a triangle shows MAJOR.MINOR and names the whole mark', () => {
    const html = renderToStaticMarkup(<RevisionTriangle mark="2.1.3" />)
    expect(html).toContain('aria-label="Revision 2.1.3"')
    expect(html).toContain('>2.1</text>')
  })

  test('progress is told in numbers, and not made up where it is not known', () => {
    expect(renderToStaticMarkup(<PencilLine label="Reading" share={0.4} />)).toContain('aria-valuenow="40"')
    expect(renderToStaticMarkup(<PencilLine label="Reading" />)).not.toContain('aria-valuenow')
  })
})

describe('controls', () => {
  test('a field names its fault and its hint', () => {
    const html = renderToStaticMarkup(
      <Field label="E-mail" hint="You sign in with it." error="This is not an e-mail address" />,
    )
    const id = /<input[^>]* id="([^"]+)"/.exec(html)?.[1] ?? ''
    expect(html).toContain(`<label for="${id}"`)
    expect(html).toContain(`aria-describedby="${id}-hint ${id}-fault"`)
    expect(html).toContain('aria-invalid="true"')
    expect(html).toContain(`id="${id}-fault"`)
  })

  test('an act that is not available says why and stays in the tab order', () => {
    const html = renderToStaticMarkup(<Button unavailable="Two remarks are open">Approve</Button>)
    const id = /aria-describedby="([^"]+)"/.exec(html)?.[1] ?? 'none'
    expect(html).toContain('aria-disabled="true"')
    expect(html).not.toMatch(/ disabled/)
    expect(html).toMatch(new RegExp(`id="${id}"[^>]*>Two remarks are open`))
  })
})

describe('a row of the library', () => {
  test('says name, code, kind, value with unit, frequency and state', () => {
    const html = inPage(<ModelRow row={row('RUN-09', 'Wheelset hunting', { draftKind: 'hard' })} />)
    expect(html).toContain('href="/m/RUN-09"')
    for (const word of [
      'Wheelset hunting',
      'RUN-09',
      'Soft',
      '50.00',
      'm/s',
      '2.32',
      'Hz',
      'In force',
      'Draft turns it hard',
    ]) {
      expect(html).toContain(word)
    }
  })

  test('a page that ends at a turning point does not look like firm ground', () => {
    const html = inPage(<ModelRow row={row('RCT-03', 'Fold', { card: foldCard })} />)
    expect(html).toContain('Turning point')
    expect(html).not.toContain('No onset')
    expect(inPage(<ModelRow row={row('SHM-06', 'Trailer', { card: steadyCard })} />)).toContain('No onset')
  })

  test('promises nothing that only computed cycles could tell', () => {
    const html = inPage(<ModelRow row={row('WNG-01', 'Wing', { card: hardCard })} />)
    expect(html).not.toMatch(/recovers|at once|any size|comes back at/i)
  })

  test('a page without a card says so', () => {
    expect(inPage(<ModelRow row={row('RUN-10', 'New', { state: 'draft', mark: null, card: null })} />)).toContain(
      'No verdict yet',
    )
  })
})
