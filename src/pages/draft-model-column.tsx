import { type ReactNode, useMemo, useRef, useState } from 'react'
import { Segments } from '#src/components/segments.tsx'
import type { DraftConnection } from '#src/features/editor/draft-connection.ts'
import { useDraftHistory, useHistoryKeys } from '#src/features/editor/draft-history.ts'
import { EquationEditor } from '#src/features/editor/equation-editor.tsx'
import { FaultList, focusPlace, unplacedFaults } from '#src/features/editor/fault-list.tsx'
import { changedLines } from '#src/features/editor/line-changes.ts'
import { ParameterTable } from '#src/features/editor/parameter-table.tsx'
import { SettingsFields } from '#src/features/editor/settings-fields.tsx'
import { StateTable } from '#src/features/editor/state-table.tsx'
import { useDraftContent } from '#src/features/editor/use-draft-content.ts'
import { EquationLines, Formula } from '#src/features/revisions/equation-lines.tsx'
import { phoneWidth, useMediaQuery } from '#src/hooks/use-media-query.ts'
import { shortFigure } from '#src/lib/figures.ts'
import type { CardState } from '#src/workers/card-runner.ts'
import { changedSymbols, faultsByPath, messagesOf, valuesOf } from './draft-notes.ts'
import type { Earlier } from './use-in-force.ts'

export interface DraftModelColumnProps {
  connection: DraftConnection
  live: CardState
  readOnly: boolean
  earlier: Earlier | null
}

/** Equations, parameters, states and settings of the draft: what is typed on the left of the co-edit view. */
export function DraftModelColumn({ connection, live, readOnly, earlier }: DraftModelColumnProps) {
  const { doc, awareness } = connection
  const content = useDraftContent(doc)
  const [shape, setShape] = useState<'typed' | 'typeset'>('typed')
  const [line, setLine] = useState(1)
  const column = useRef<HTMLElement>(null)
  const history = useDraftHistory(doc)
  useHistoryKeys(column, history, !readOnly)
  const narrow = useMediaQuery(phoneWidth)
  const checked = live.checked
  const faults = useMemo(() => faultsByPath(checked?.errors ?? []), [checked])
  const messages = useMemo(() => messagesOf(live), [live])
  const values = useMemo(() => valuesOf(live), [live])
  const names = useMemo(
    () =>
      [
        ...content.parameters.map((row) => ({
          symbol: row.symbol,
          detail: [row.meaning, row.value, row.unit].filter(Boolean).join(' '),
        })),
        ...content.states.map((row) => ({ symbol: row.symbol, detail: row.meaning || 'state' })),
        ...(checked?.helpers ?? []).map((symbol) => ({ symbol, detail: 'helper quantity' })),
      ].filter(({ symbol }) => symbol !== ''),
    [content.parameters, content.states, checked],
  )
  const changed = useMemo(() => changedSymbols(content.parameters, earlier), [content.parameters, earlier])
  const changedEquations = useMemo(
    () => earlier && { lines: changedLines(earlier.document.equations, content.equations), mark: earlier.mark },
    [content.equations, earlier],
  )
  const goTo = (place: string) => {
    if (place === 'equations') setShape('typed')
    // The block is only there to be focused once it is shown.
    requestAnimationFrame(() => column.current && focusPlace(column.current, place))
  }
  const atCaret = checked?.lines.find((entry) => entry.line === line && entry.tex !== null)
  const document = live.card?.document
  const control = document?.parameters.find((row) => row.symbol === document.control)
  return (
    <section ref={column} aria-label="Model" className="sheet grid min-w-0 content-start">
      <header className="flex flex-wrap items-center justify-between gap-2 px-4 py-2.5">
        <h2 className="text-subtitle">Equations</h2>
        <Segments
          label="How the equations are shown"
          value={shape}
          onChange={setShape}
          options={[
            { value: 'typed', label: 'Typed' },
            { value: 'typeset', label: 'Typeset' },
          ]}
        />
        {control && (
          <span className="text-label text-ink-2">{`values at ${control.symbol} = ${shortFigure(control.value)}`}</span>
        )}
      </header>
      <div hidden={shape !== 'typed'}>
        {narrow && !readOnly && (
          <p className="px-4 pb-2 text-note text-ink-2">
            Equations are read only in a window this narrow: a line has to be seen whole to be changed. Tables and
            settings below can be edited.
          </p>
        )}
        <EquationEditor
          text={doc.getText('equations')}
          awareness={awareness}
          history={history}
          readOnly={readOnly || narrow}
          changed={changedEquations}
          messages={messages}
          values={values}
          names={names}
          onLine={setLine}
        />
        <p className="min-h-11 border-b border-rule px-4 py-2">
          <span className="block text-label text-ink-3">line at the caret</span>
          {atCaret ? <Formula tex={atCaret.tex} text={atCaret.text} /> : <span className="text-ink-3">–</span>}
        </p>
      </div>
      {shape === 'typeset' && (
        <div className="bg-well px-4 py-3">
          <EquationLines
            lines={(checked?.lines ?? []).map((entry) => ({
              ...entry,
              kind: entry.kind === 'unread' ? 'helper' : entry.kind,
            }))}
          />
        </div>
      )}
      <FaultList faults={unplacedFaults(checked?.errors ?? [])} onGo={goTo} />
      <Part title="Parameters">
        <ParameterTable doc={doc} content={content} readOnly={readOnly} faults={faults} changed={changed} />
      </Part>
      <Part title="States">
        <StateTable doc={doc} content={content} readOnly={readOnly} faults={faults} />
      </Part>
      <Part title="Settings and notes">
        <SettingsFields
          doc={doc}
          content={content}
          readOnly={readOnly}
          faults={faults}
          helpers={checked?.helpers ?? []}
        />
      </Part>
    </section>
  )
}

function Part({ title, children }: { title: string; children: ReactNode }) {
  return (
    <section aria-label={title} className="border-t border-rule px-4 py-3">
      <h2 className="mb-1 text-subtitle">{title}</h2>
      {children}
    </section>
  )
}
