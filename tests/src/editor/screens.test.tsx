import { renderToStaticMarkup } from 'react-dom/server'
import { describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { checkDraft, draftFromDocument } from '#shared/model/draft.ts'
import { writeDraft } from '#shared/ydoc/shape.ts'
import type { DraftConnectionState } from '#src/features/editor/draft-connection.ts'
import { FaultList, placeOf, unplacedFaults } from '#src/features/editor/fault-list.tsx'
import { ParameterTable } from '#src/features/editor/parameter-table.tsx'
import { isOpenToEdits, saveWords } from '#src/features/editor/save-state.tsx'
import { SettingsFields } from '#src/features/editor/settings-fields.tsx'
import { StateTable } from '#src/features/editor/state-table.tsx'
import { faultsByPath } from '#src/pages/draft-notes.ts'
import { calm } from '#tests/support/models.ts'

function draftOf(change: (draft: ReturnType<typeof draftFromDocument>) => void) {
  const content = draftFromDocument(calm)
  change(content)
  const doc = new Y.Doc()
  writeDraft(doc, content)
  const checked = checkDraft(content)
  const errors = checked.ok ? [] : checked.errors
  return { doc, content, errors, faults: faultsByPath(errors) }
}

describe('every fault of a draft has a place', () => {
  test('an uncertainty that cannot be read is told in its own cell', () => {
    const { doc, content, errors, faults } = draftOf(({ parameters: [first] }) => {
      if (first) first.uncertainty = 'about 3'
    })
    expect(errors.map(({ path }) => path)).toEqual(['parameters[0].uncertainty'])
    const html = renderToStaticMarkup(
      <ParameterTable doc={doc} content={content} readOnly={false} faults={faults} changed={null} />,
    )
    const cell = /<input[^>]*aria-label="Uncertainty of p"[^>]*>/.exec(html)?.[0] ?? ''
    expect(cell).toContain('value="about 3"')
    expect(cell).toContain('aria-invalid="true"')
    expect(html).toContain('Write the uncertainty as')
    expect(unplacedFaults(errors)).toEqual([])
  })

  test('a second control that is the control is told at its field, and in the list that leads there', () => {
    const { doc, content, errors, faults } = draftOf(({ settings }) => {
      settings.secondControl = settings.control ?? ''
    })
    expect(errors.map(({ path }) => path)).toEqual(['secondControl'])
    const html = renderToStaticMarkup(
      <SettingsFields doc={doc} content={content} readOnly={false} faults={faults} helpers={[]} />,
    )
    const field = /<select[^>]*data-place="secondControl"[^>]*>/.exec(html)?.[0] ?? ''
    expect(field).toContain('aria-invalid="true"')
    const list = renderToStaticMarkup(<FaultList faults={unplacedFaults(errors)} onGo={() => undefined} />)
    expect(list).toMatch(/<button[^>]*>[^<]*control/)
  })

  test('a fault of a row is told under it, whatever part of the row it names', () => {
    const { doc, content } = draftOf(() => undefined)
    const faults = new Map([
      ['states[0]', 'of the row'],
      ['states[0].meaning.deep', 'of a part'],
    ])
    const html = renderToStaticMarkup(<StateTable doc={doc} content={content} readOnly={false} faults={faults} />)
    expect(html).toContain('of the row')
    expect(html).toContain('of a part')
  })

  test('a table without rows and a model without equations are in the list', () => {
    const { errors } = draftOf((draft) => {
      draft.equations = ''
      draft.states = []
    })
    const places = unplacedFaults(errors).map(({ path }) => placeOf(path ?? ''))
    expect(places).toContain('equations')
    expect(places).toContain('states')
  })
})

test('the control parameter is lit however its symbol is written', () => {
  const { doc, content, faults } = draftOf(({ parameters: [first], settings }) => {
    if (first) first.symbol = 'μ'
    settings.control = 'mu'
  })
  const html = renderToStaticMarkup(
    <ParameterTable doc={doc} content={content} readOnly={false} faults={faults} changed={null} />,
  )
  expect(html).toMatch(/<tbody class="[^"]*bg-pencil-tint/)
})

describe('what is said of saving', () => {
  const state: DraftConnectionState = {
    phase: 'saving',
    room: 'live',
    generation: 1,
    synced: true,
    unsaved: 2,
    closed: null,
  }
  test('edits that are held back are not said to be on their way', () => {
    expect(saveWords(state)).toBe('Saving')
    expect(saveWords({ ...state, room: 'not-saving' })).toBe('Not saving')
    expect(saveWords({ ...state, room: 'full' })).toBe('Not saved: 2 edits')
    expect(saveWords({ ...state, room: 'no-room', unsaved: 1 })).toBe('Not saved: 1 edit')
    expect(saveWords({ ...state, phase: 'offline' })).toBe('Offline, 2 edits kept here')
  })

  test('nothing can be typed where nothing is taken; a cut line and a full block leave it open', () => {
    const open = (change: Partial<DraftConnectionState>) => isOpenToEdits({ ...state, ...change })
    expect([open({}), open({ phase: 'offline' }), open({ room: 'full' })]).toEqual([true, true, true])
    for (const room of ['not-saving', 'no-room', 'locked', 'read-only', null] as const)
      expect(open({ room })).toBe(false)
    expect([open({ synced: false }), open({ phase: 'refused' })]).toEqual([false, false])
  })
})
