import { Link } from 'react-router-dom'
import type { RevisionHead } from '#shared/api/pages.ts'
import { ButtonLink } from '#src/components/button.tsx'
import { Check } from '#src/components/check.tsx'
import { EdgeStrip } from '#src/components/edge-strip.tsx'
import { OnsetWord } from '#src/components/onset-glyph.tsx'
import { RevisionTriangle } from '#src/components/revision-triangle.tsx'
import { StateWord } from '#src/components/signature-strip.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { shortName } from '#src/lib/initials.ts'
import { momentWithOffset, utcDayOf } from '#src/lib/times.ts'

export interface RecordTableProps {
  code: string
  revisions: readonly RevisionHead[]
  /** Marks ticked for comparison, at most two. */
  ticked: readonly string[]
  onTick: (marks: string[]) => void
}

const signed = (revision: RevisionHead, meaning: 'written' | 'approved' | 'withdrawn') =>
  revision.signatures.filter((signature) => signature.meaning === meaning)

/** All revisions of a page as a drawing's revision table, newest first. Any can be opened; two can be compared. */
export function RecordTable({ code, revisions, ticked, onTick }: RecordTableProps) {
  // Newest first on both sides, so that "was" is always the older one.
  const pair = revisions.map((revision) => revision.mark).filter((mark) => ticked.includes(mark))
  const [newer, older] = pair
  const tick = (mark: string, on: boolean) =>
    onTick(
      on ? [...ticked.filter((other) => other !== mark).slice(-1), mark] : ticked.filter((other) => other !== mark),
    )
  return (
    <div className="sheet">
      <div className="flex flex-wrap items-center justify-between gap-3 px-4 py-3">
        <p className="text-note text-ink-2">
          {pair.length === 2 ? `Comparing ${older} with ${newer}` : 'Tick two revisions to compare them.'}
        </p>
        {older && newer && (
          <ButtonLink to={`/m/${code}/rev/${newer}?with=${older}`} look="first">
            Show differences
          </ButtonLink>
        )}
      </div>
      <Table caption="Revisions, newest first">
        <TableHead
          columns={[
            { label: 'Compare', hidden: true },
            'Revision',
            'State',
            'What changed',
            'Written',
            'Approved',
            'Onset',
            'Edge, to scale',
          ]}
        />
        <tbody>
          {revisions.map((revision) => (
            <Row key={revision.mark}>
              <Cell>
                <Check
                  labelHidden
                  checked={ticked.includes(revision.mark)}
                  onChange={(event) => tick(revision.mark, event.target.checked)}
                >
                  Compare revision {revision.mark}
                </Check>
              </Cell>
              <Cell>
                <span className="flex items-center gap-2.5">
                  <RevisionTriangle mark={revision.mark} />
                  <Link
                    to={`/m/${code}/rev/${revision.mark}`}
                    className="link figures inline-block min-h-6 whitespace-nowrap"
                  >
                    {revision.mark}
                  </Link>
                </span>
              </Cell>
              <Cell>
                <StateWord state={revision.state} />
                <span
                  className="block text-label text-ink-2"
                  title={momentWithOffset(revision.settledAt ?? revision.sentAt)}
                >
                  {utcDayOf(revision.settledAt ?? revision.sentAt)}
                </span>
              </Cell>
              <Cell className="min-w-52">
                {revision.summary}
                {revision.reason && <span className="block text-note text-ink-2">Withdrawn: {revision.reason}</span>}
              </Cell>
              <Cell className="text-note whitespace-nowrap">
                {signed(revision, 'written')
                  .map((one) => shortName(one.person.name))
                  .join(', ')}
              </Cell>
              <Cell className="text-note whitespace-nowrap">
                {signed(revision, 'approved').map((one) => (
                  <span key={one.at} className="block" title={momentWithOffset(one.at)}>
                    {shortName(one.person.name)}, {utcDayOf(one.at)}
                  </span>
                ))}
                {signed(revision, 'approved').length === 0 && <span className="text-ink-3">not yet</span>}
              </Cell>
              <Cell>{revision.card && <OnsetWord kind={revision.card.kind} size={18} />}</Cell>
              <Cell>
                {revision.card && <EdgeStrip card={revision.card} width={180} faded={revision.state === 'withdrawn'} />}
              </Cell>
            </Row>
          ))}
        </tbody>
      </Table>
      <p className="px-4 py-2.5 text-label text-ink-3">Days in UTC.</p>
    </div>
  )
}
