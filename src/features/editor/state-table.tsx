import type * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import type { StateCell } from '#shared/ydoc/shape.ts'
import { type DraftColumn, DraftTable } from './draft-table.tsx'
import { addState, removeState, setStateCell } from './draft-tables.ts'

export interface StateTableProps {
  doc: Y.Doc
  content: DraftContent
  readOnly: boolean
  /** Faults by path of the model document: "states[0].low". */
  faults: ReadonlyMap<string, string>
}

const columns: DraftColumn<StateCell>[] = [
  { cell: 'symbol', label: 'Symbol', figures: true, className: 'w-[17%]' },
  { cell: 'low', label: 'From', figures: true, className: 'w-[18%]' },
  { cell: 'high', label: 'To', figures: true, className: 'w-[18%]' },
  { cell: 'start', label: 'Start', figures: true, className: 'w-[19%]', placeholder: 'middle' },
  { cell: 'unit', label: 'Unit', figures: false, className: 'w-[17%]' },
]

const below: DraftColumn<StateCell>[] = [
  { cell: 'meaning', label: 'Meaning', figures: false, className: 'min-w-0 flex-1', placeholder: 'meaning' },
]

/** The state table: the box that steady states are looked for in, and the values the model starts from. */
export function StateTable({ doc, content, readOnly, faults }: StateTableProps) {
  return (
    <DraftTable
      caption="States of the model and the box that steady states are looked for in"
      table="states"
      noun="state"
      rows={content.states}
      columns={columns}
      below={below}
      readOnly={readOnly}
      faults={faults}
      onCell={(id, cell, value) => setStateCell(doc, id, cell, value)}
      onRemove={(id) => removeState(doc, id)}
      onAdd={() => addState(doc)}
      empty="No state yet. Each equation dx/dt = … has its state here."
    />
  )
}
