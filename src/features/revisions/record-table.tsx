import { Link } from 'react-router-dom'
import type { RevisionHead } from '#shared/api/pages.ts'
import { ButtonLink } from '#src/components/button.tsx'
import { EdgeStrip } from '#src/components/edge-strip.tsx'
import { OnsetWord } from '#src/components/onset-glyph.tsx'
import { RevisionTriangle } from '#src/components/revision-triangle.tsx'
import { StateWord } from '#src/components/signature-strip.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { useMedia } from '#src/hooks/use-media.ts'
import { classes } from '#src/lib/class-names.ts'
import { momentWithOffset } from '#src/lib/times.ts'
import { CompareTick, RecordItem, type RecordRowProps, RevisionDay, signersOf } from './record-rows.tsx'

export interface RecordTableProps {
  code: string
  revisions: readonly RevisionHead[]
  /** Marks ticked for comparison, at most two. */
  ticked: readonly string[]
  onTick: (marks: string[]) => void
}

/** All revisions of a page as a drawing's revision table, newest first. Any can be opened; two can be compared. */
export function RecordTable({ code, revisions, ticked, onTick }: RecordTableProps) {
  // The table needs a bench's width; narrower, a revision is a block of its own.
  const narrow = useMedia('(width < 70rem)')
  // Newest first on both sides, so that "was" is always the older one.
  const [newer, older] = revisions.map((revision) => revision.mark).filter((mark) => ticked.includes(mark))
  const tick = (mark: string, on: boolean) =>
    onTick(
      on ? [...ticked.filter((other) => other !== mark).slice(-1), mark] : ticked.filter((other) => other !== mark),
    )
  const rows = revisions.map(
    (revision): RecordRowProps => ({
      code,
      revision,
      ticked: ticked.includes(revision.mark),
      onTick: (on) => tick(revision.mark, on),
    }),
  )
  return (
    <div className="sheet">
      <div className="flex min-h-13 flex-wrap items-center justify-between gap-3 border-b border-rule px-4 py-2.5">
        <p className="text-note text-ink-2">
          {older && newer ? `Comparing ${older} with ${newer}` : 'Tick two revisions to compare them.'}
        </p>
        {older && newer && (
          <ButtonLink to={`/m/${code}/rev/${newer}?with=${older}`} look="first">
            Show differences
          </ButtonLink>
        )}
      </div>
      {narrow ? (
        <ul aria-label="Revisions, newest first">
          {rows.map((row) => (
            <RecordItem key={row.revision.mark} {...row} />
          ))}
        </ul>
      ) : (
        <Table caption="Revisions, newest first">
          <TableHead
            columns={[
              { label: 'Compare', hidden: true },
              { label: 'Revision', className: 'tablet:px-2' },
              { label: 'State', className: 'tablet:px-2' },
              'What changed',
              'Written',
              'Checked',
              'Approved',
              'Edge, to scale',
              'Onset',
            ]}
          />
          <tbody>
            {rows.map((row) => (
              <RecordRow key={row.revision.mark} {...row} />
            ))}
          </tbody>
        </Table>
      )}
    </div>
  )
}

function RecordRow({ code, revision, ticked, onTick }: RecordRowProps) {
  const quiet = revision.state === 'withdrawn'
  return (
    <Row className={classes('h-20', quiet && 'text-ink-2')}>
      <Cell>
        <CompareTick revision={revision} ticked={ticked} onTick={onTick} />
      </Cell>
      <Cell className="tablet:px-2">
        <Link
          to={`/m/${code}/rev/${revision.mark}`}
          aria-label={`Open revision ${revision.mark}`}
          className="grid min-h-11 min-w-11 place-items-center rounded-control text-ink hover:bg-pencil-tint"
        >
          <RevisionTriangle mark={revision.mark} size={38} />
        </Link>
      </Cell>
      <Cell className="tablet:px-2">
        <StateWord state={revision.state} />
        <span className="mt-0.5 block text-note whitespace-nowrap text-ink-2">
          <span className="figures text-label">{revision.mark}</span>, <RevisionDay revision={revision} />
        </span>
      </Cell>
      <Cell className="min-w-52 font-[560]">
        <Link to={`/m/${code}/rev/${revision.mark}`} className="link inline-block min-h-6" tabIndex={-1}>
          {revision.summary}
        </Link>
        {revision.reason && <span className="block text-note font-[400] text-ink-2">Withdrawn: {revision.reason}</span>}
      </Cell>
      <Signers revision={revision} meaning="written" />
      <Signers revision={revision} meaning="checked" />
      <Signers revision={revision} meaning="approved" />
      <Cell className="min-w-52">{revision.card && <EdgeStrip card={revision.card} width={180} faded={quiet} />}</Cell>
      <Cell>{revision.card && <OnsetWord kind={revision.card.kind} size={20} />}</Cell>
    </Row>
  )
}

function Signers({ revision, meaning }: { revision: RevisionHead; meaning: 'written' | 'checked' | 'approved' }) {
  const signers = signersOf(revision, meaning)
  return (
    <Cell className="text-note">
      {signers.map(({ name, at }) => (
        <span key={name} className="block whitespace-nowrap" title={momentWithOffset(at)}>
          {name}
        </span>
      ))}
      {signers.length === 0 && (
        <span className="text-ink-3">
          <span aria-hidden>–</span>
          <span className="sr-only">nobody yet</span>
        </span>
      )}
    </Cell>
  )
}
