import type { ReactNode } from 'react'
import type { Page, RevisionHead } from '#shared/api/pages.ts'
import { SectionBar } from '#src/components/section-bar.tsx'
import { SignatureStrip, StateWord } from '#src/components/signature-strip.tsx'
import { TitleBlock, type TitleCell } from '#src/components/title-block.tsx'
import { shortName } from '#src/lib/initials.ts'
import { momentWithOffset, utcDay } from '#src/lib/times.ts'

const names = (revision: RevisionHead, meaning: 'written' | 'checked') =>
  revision.signatures
    .filter((signature) => signature.meaning === meaning)
    .map((signature) => shortName(signature.person.name))

export type PageSection = 'model' | 'behaviour' | 'sources' | 'record'

export interface ModelHeadProps {
  page: Page
  /** The revision shown; null while the draft is. */
  revision: RevisionHead | null
  title: string
  note: string
  current: readonly PageSection[]
  /** Where the sections lead: the read view or the co-edit view. */
  editing?: boolean
  acts?: ReactNode
}

/** Title block and sections of a model page: who wrote and approved what is shown, and what is in force. */
export function ModelHead({ page, revision, title, note, current, editing = false, acts }: ModelHeadProps) {
  const approved = revision?.signatures.find((signature) => signature.meaning === 'approved')
  const written = revision
    ? names(revision, 'written')
    : (page.draft?.writers ?? []).map((person) => shortName(person.name))
  const checked = revision ? names(revision, 'checked') : []
  // A revision that is in force says so itself; the last cell would only say it again.
  const itselfInForce = revision !== null && revision.mark === page.inForce?.mark
  const cells: TitleCell[] = [
    { label: 'Page', value: <span className="figures font-[640]">{page.code}</span>, drops: 'first' },
    revision
      ? { label: `Revision ${revision.mark}`, value: <StateWord state={revision.state} /> }
      : { label: 'Draft', value: <StateWord state={page.inReview ? 'in-review' : 'draft'} /> },
    {
      label: 'Written',
      value: written.length === 0 ? <span className="text-ink-3">nobody yet</span> : shortList(written),
      drops: 'first',
    },
    {
      label: 'Checked',
      value: checked.length === 0 ? <span className="text-ink-3">not yet</span> : shortList(checked),
      drops: 'first',
    },
    {
      label: 'Approved',
      value: approved ? (
        <span title={momentWithOffset(approved.at)}>
          {shortName(approved.person.name)}, {utcDay(approved.at)}
        </span>
      ) : (
        <span className="text-ink-3">not yet</span>
      ),
      drops: 'second',
    },
  ]
  if (!itselfInForce) {
    cells.push({
      label: 'In force',
      value: page.inForce ? (
        <span className="inline-flex items-center gap-2">
          <SignatureStrip state="in-force" />
          <span className="figures">{page.inForce.mark}</span>
        </span>
      ) : (
        <span className="text-ink-3">nothing</span>
      ),
    })
  }
  const base = `/m/${page.code}`
  const sections = [
    { to: editing ? `${base}/edit` : `${base}/model`, label: 'Model', current: current.includes('model') },
    { to: editing ? `${base}/edit` : base, label: 'Behaviour', current: current.includes('behaviour') },
    { to: `${base}/sources`, label: 'Sources', count: page.counts.sources, current: current.includes('sources') },
    { to: `${base}/record`, label: 'Record', count: page.counts.revisions, current: current.includes('record') },
  ]
  return (
    <div className="grid gap-1.5">
      <TitleBlock title={title} note={`${page.group.name}. ${note}`} cells={cells} />
      <SectionBar label="Sections of the page" sections={sections}>
        {acts}
      </SectionBar>
    </div>
  )
}

const shortList = (all: readonly string[]) =>
  all.length > 2 ? `${all.slice(0, 2).join(', ')} and ${all.length - 2} more` : all.join(', ')
