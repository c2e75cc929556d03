import type { ReactNode } from 'react'
import { Button } from '#src/components/button.tsx'
import { TextField } from '#src/components/field.tsx'
import { Select } from '#src/components/select.tsx'
import { type DraftRemark, written } from './remarks.ts'
import type { Remarks } from './use-remarks.ts'

/** Lines and symbols a remark may be pinned to. */
export interface RemarkTargets {
  lines: readonly { line: number; text: string }[]
  symbols: readonly string[]
}

export interface RemarkFormProps {
  remarks: Remarks
  targets: RemarkTargets
  pending: boolean
  onReturn: () => void
  /** What went wrong with the last try. */
  fault: ReactNode
}

/** Remarks to write, one or more, and the act that returns the revision with them. */
export function RemarkForm({ remarks, targets, pending, onReturn, fault }: RemarkFormProps) {
  const count = written(remarks.all).length
  return (
    <form
      className="grid gap-3"
      aria-labelledby="write-remarks"
      onSubmit={(event) => {
        event.preventDefault()
        if (count > 0) onReturn()
      }}
    >
      <h2 id="write-remarks" className="flex items-baseline justify-between text-subtitle">
        Remarks
        <span className="text-note font-[400] text-ink-2">{count === 0 ? 'none written' : `${count} written`}</span>
      </h2>
      {remarks.all.map((remark, index) => (
        <RemarkField key={remark.id} remark={remark} index={index} targets={targets} onChange={remarks.change} />
      ))}
      {fault}
      <div className="flex flex-wrap gap-2">
        <Button type="submit" pending={pending} unavailable={count === 0 && 'Write a remark first.'}>
          Return with remarks
        </Button>
        {count > 0 && (
          <Button look="quiet" onClick={remarks.add}>
            Another remark
          </Button>
        )}
      </div>
    </form>
  )
}

function RemarkField({
  remark,
  index,
  targets,
  onChange,
}: {
  remark: DraftRemark
  index: number
  targets: RemarkTargets
  onChange: Remarks['change']
}) {
  return (
    <fieldset className="grid gap-2">
      <legend className="sr-only">Remark {index + 1}</legend>
      <TextField
        label={`Remark ${index + 1}`}
        value={remark.text}
        rows={3}
        maxLength={4000}
        data-remark={index === 0 ? 'first' : undefined}
        onChange={(event) => onChange(remark.id, { text: event.target.value })}
      />
      <Select
        label="Speaks of"
        value={remark.target}
        onChange={(event) => onChange(remark.id, { target: event.target.value })}
        options={[
          { value: '', label: 'the whole revision' },
          ...targets.lines.map(({ line, text }) => ({
            value: `line ${line}`,
            label: `line ${line}: ${text.slice(0, 48)}`,
          })),
          ...targets.symbols.map((symbol) => ({ value: `symbol ${symbol}`, label: symbol })),
        ]}
      />
    </fieldset>
  )
}
