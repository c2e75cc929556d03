import type { ReactNode } from 'react'
import { onsetKinds, rowStates } from '#shared/api/pages.ts'
import type { LibraryFilters } from '#src/api/pages.ts'
import { Check } from '#src/components/check.tsx'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { stateWord } from '#src/components/signature-strip.tsx'
import { toggled } from './library-address.ts'

export interface FacetCounts {
  onset: { value: string; label: string; count: number }[]
  state: { value: string; label: string; count: number }[]
  group: { value: string; label: string; count: number }[]
}

const onsetLabel = { hard: 'Hard', soft: 'Soft', undecided: 'Undecided', none: 'No onset in range' } as const

/** What narrows the library. A group of boxes without a tick narrows nothing. */
export function LibraryFacets(props: {
  filters: LibraryFilters
  counts: FacetCounts | undefined
  onChange: (filters: LibraryFilters) => void
}) {
  const { filters, counts, onChange } = props
  const count = (facet: keyof FacetCounts, value: string) =>
    counts === undefined ? undefined : (counts[facet].find((item) => item.value === value)?.count ?? 0)
  // Chosen groups stay in the list even when nothing in them matches any more.
  const groups = counts?.group ?? []
  return (
    <div className="grid gap-5">
      <FacetGroup title="Onset">
        {onsetKinds.map((kind) => (
          <Check
            key={kind}
            checked={filters.onset?.includes(kind) ?? false}
            count={count('onset', kind)}
            onChange={() => onChange({ ...filters, onset: toggled(filters.onset, kind) })}
          >
            <OnsetGlyph kind={kind} size={18} />
            {onsetLabel[kind]}
          </Check>
        ))}
      </FacetGroup>
      <FacetGroup title="State">
        {rowStates.map((state) => (
          <Check
            key={state}
            checked={filters.state?.includes(state) ?? false}
            count={count('state', state)}
            onChange={() => onChange({ ...filters, state: toggled(filters.state, state) })}
          >
            {stateWord[state]}
          </Check>
        ))}
      </FacetGroup>
      {groups.length > 0 && (
        <FacetGroup title="Group">
          {groups.map((group) => (
            <Check
              key={group.value}
              checked={filters.group?.includes(group.value) ?? false}
              count={group.count}
              onChange={() => onChange({ ...filters, group: toggled(filters.group, group.value) })}
            >
              {group.label}
            </Check>
          ))}
        </FacetGroup>
      )}
    </div>
  )
}

function FacetGroup({ title, children }: { title: string; children: ReactNode }) {
  return (
    <fieldset className="grid min-w-0">
      <legend className="mb-1 font-[640]">{title}</legend>
      {children}
    </fieldset>
  )
}
