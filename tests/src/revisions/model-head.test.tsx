import { renderToStaticMarkup } from 'react-dom/server'
import { MemoryRouter } from 'react-router-dom'
import { describe, expect, test } from 'vitest'
import type { Page, RevisionHead } from '#shared/api/pages.ts'
import { ModelHead } from '#src/features/revisions/model-head.tsx'
import { RecordTable } from '#src/features/revisions/record-table.tsx'
import { StateBand } from '#src/features/revisions/state-band.tsx'
import { summary } from '../fixtures.ts'

const person = (id: number, name: string) => ({ id, name })
const signed = (name: string, meaning: RevisionHead['signatures'][number]['meaning']) => ({
  person: person(name.length, name),
  meaning,
  at: '2026-11-09T23:30:00.000Z',
})
const head = (more: Partial<RevisionHead> = {}): RevisionHead => ({
  mark: '1.5.0',
  state: 'in-force',
  summary: 'Critical speed from the rig runs',
  sentBy: person(1, 'Tove Marrowby'),
  sentAt: '2026-11-08T08:00:00.000Z',
  settledAt: '2026-11-09T23:30:00.000Z',
  reason: null,
  base: null,
  signatures: [
    signed('Tove Marrowby', 'written'),
    signed('Kezia Bolderwick', 'checked'),
    signed('Ines Hathersedge-Vold', 'approved'),
  ],
  engine: '0.1.0',
  fingerprint: `sha256:${'0'.repeat(64)}`,
  card: summary(),
  etag: '1.5.0.in-force',
  ...more,
})
const page = (inForce: RevisionHead | null): Page => ({
  id: 1,
  code: 'RUN-09',
  title: 'Wheelset',
  summary: '',
  field: '',
  group: { slug: 'fellside-rail', name: 'Fellside Rail' },
  access: 'open',
  state: 'in-force',
  role: 'visitor',
  may: [],
  inForce,
  lastPublic: null,
  inReview: null,
  draft: null,
  counts: { sources: 0, revisions: 1 },
  etag: '1',
})
const text = (element: React.ReactElement) =>
  renderToStaticMarkup(<MemoryRouter>{element}</MemoryRouter>)
    .replaceAll(/<[^>]+>/g, ' ')
    .replaceAll(/\s+/g, ' ')
const headOf = (revision: RevisionHead | null, inForce: RevisionHead | null) =>
  text(<ModelHead page={page(inForce)} revision={revision} title="Wheelset" note="" current={['behaviour']} />)

describe('the title block', () => {
  test('says who wrote, checked and approved; the day of a signature in UTC, and that it is', () => {
    const shown = headOf(head(), head())
    expect(shown).toContain('Written T. Marrowby')
    expect(shown).toContain('Checked K. Bolderwick')
    expect(shown).toContain('Approved I. Hathersedge-Vold, 9 Nov 2026 UTC')
  })

  test('of a revision under review says that nobody checked it yet, and what is in force', () => {
    const shown = headOf(head({ mark: '2.0.0', state: 'in-review', signatures: [] }), head())
    expect(shown).toContain('Checked not yet')
    expect(shown).toContain('In force 1.5.0')
  })
})

test('the record has a column for the check, and days in UTC that say so', () => {
  const shown = text(<RecordTable code="RUN-09" revisions={[head()]} ticked={[]} onTick={() => {}} />)
  expect(shown).toContain('Written Checked Approved')
  expect(shown).toContain('T. Marrowby K. Bolderwick I. Hathersedge-Vold')
  expect(shown).toContain('9 Nov 2026 UTC')
})

test('the band tells the day in the viewer’s zone with its offset in the title', () => {
  const band = renderToStaticMarkup(
    <StateBand revision={head({ state: 'superseded' })} inForce="2.0.0" code="RUN-09" />,
  )
  expect(band).toMatch(/title="[^"]*\(UTC[+−]\d\d:\d\d\)"/)
  expect(band).toContain('Revision 2.0.0 is in force.')
})
