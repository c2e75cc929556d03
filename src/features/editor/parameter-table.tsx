import type * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import { sameSymbol } from '#shared/stability/summary.ts'
import type { ParameterCell } from '#shared/ydoc/shape.ts'
import { ChangeTriangle } from '#src/components/revision-triangle.tsx'
import { type DraftColumn, DraftTable } from './draft-table.tsx'
import { addParameter, removeParameter, setParameterCell } from './draft-tables.ts'

export interface ParameterTableProps {
  doc: Y.Doc
  content: DraftContent
  readOnly: boolean
  /** Faults by path of the model document: "parameters[0].value". */
  faults: ReadonlyMap<string, string>
  /** Symbols whose row differs from the revision in force, with that revision's mark. */
  changed: { symbols: ReadonlySet<string>; mark: string } | null
}

const columns: DraftColumn<ParameterCell>[] = [
  { cell: 'symbol', label: 'Symbol', figures: true, className: 'w-[17%]' },
  { cell: 'value', label: 'Value', figures: true, className: 'w-[19%]', align: 'right' },
  { cell: 'unit', label: 'Unit', figures: false, className: 'w-[17%]' },
  { cell: 'low', label: 'Low', figures: true, className: 'w-[18%]' },
  { cell: 'high', label: 'High', figures: true, className: 'w-[18%]' },
]

const below: DraftColumn<ParameterCell>[] = [
  { cell: 'meaning', label: 'Meaning', figures: false, className: 'min-w-0 flex-1', placeholder: 'meaning' },
  {
    cell: 'uncertainty',
    label: 'Uncertainty',
    figures: false,
    className: 'w-[40%] shrink-0',
    placeholder: 'uncertainty',
  },
]

/** The parameter table of the draft. The control parameter's row is lit. */
export function ParameterTable({ doc, content, readOnly, faults, changed }: ParameterTableProps) {
  const control = content.settings.control ?? ''
  return (
    <DraftTable
      caption="Parameters of the model"
      table="parameters"
      noun="parameter"
      rows={content.parameters}
      columns={columns}
      below={below}
      readOnly={readOnly}
      faults={faults}
      onCell={(id, cell, value) => setParameterCell(doc, id, cell, value)}
      onRemove={(id) => removeParameter(doc, id)}
      onAdd={() => addParameter(doc)}
      lit={({ symbol }) => symbol !== '' && sameSymbol(symbol, control)}
      margin={({ symbol }, name) =>
        changed?.symbols.has(symbol) && (
          <span className="absolute top-1/2 -left-4 -translate-y-1/2 max-bench:hidden">
            <ChangeTriangle mark={changed.mark} label={`${name} changed since revision ${changed.mark}`} />
          </span>
        )
      }
      note="Uncertainty: normal 0.02 (a standard deviation) or uniform 0.5 to 2."
      empty="No parameter yet. The control parameter is one of them."
    />
  )
}
