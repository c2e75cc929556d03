import { useRef, useState } from 'react'
import type { FormattedSource, SourceTarget } from '#shared/api/sources.ts'
import { linkLabels } from '#shared/model/locators.ts'
import { useLinkSource } from '#src/api/sources.ts'
import { Button, LinkButton } from '#src/components/button.tsx'
import { FaultText, Field } from '#src/components/field.tsx'
import { Select } from '#src/components/select.tsx'
import { newIdempotencyKey } from '#src/lib/idempotency-key.ts'

export interface LinkTargets {
  symbols: readonly { symbol: string; meaning: string }[]
  /** Lines of the draft's equation block; `anchor` follows the line when others edit above it. */
  lines: readonly { line: number; text: string; anchor?: string }[]
}

const labels = [
  { value: '', label: 'no locator' },
  ...linkLabels.map((value) => ({ value: value as string, label: value as string })),
]

/** Attaches a source to a parameter or an equation line, with where in the source it stands and what it says there. */
export function LinkSource({ code, source, targets }: { code: string; source: FormattedSource; targets: LinkTargets }) {
  const [open, setOpen] = useState(false)
  const [target, setTarget] = useState('')
  const [label, setLabel] = useState('')
  const [locator, setLocator] = useState('')
  const [quoted, setQuoted] = useState('')
  const key = useRef(newIdempotencyKey())
  const link = useLinkSource(code)
  if (!open) return <LinkButton onClick={() => setOpen(true)}>Attach to a parameter or line</LinkButton>
  const options = [
    { value: '', label: 'Choose' },
    ...targets.symbols.map(({ symbol, meaning }) => ({
      value: `parameter ${symbol}`,
      label: meaning ? `${symbol}, ${meaning}` : symbol,
    })),
    ...targets.lines.map(({ line, text }) => ({ value: `line ${line}`, label: `line ${line}: ${text.slice(0, 60)}` })),
  ]
  const chosen = (): SourceTarget | null => {
    if (target.startsWith('parameter ')) return { kind: 'parameter', symbol: target.slice('parameter '.length) }
    if (!target.startsWith('line ')) return null
    const line = Number(target.slice('line '.length))
    const anchor = targets.lines.find((candidate) => candidate.line === line)?.anchor
    return { kind: 'line', line, ...(anchor ? { anchor } : {}) }
  }
  return (
    <form
      className="mt-2 grid gap-3 bg-well p-3"
      onSubmit={(event) => {
        event.preventDefault()
        const to = chosen()
        if (!to) return
        const found = linkLabels.find((candidate) => candidate === label)
        link.mutate(
          {
            source: source.id,
            key: key.current,
            body: {
              target: to,
              ...(found ? { label: found } : {}),
              ...(locator.trim() ? { locator } : {}),
              ...(quoted.trim() ? { quoted } : {}),
            },
          },
          {
            onSuccess: () => setOpen(false),
            onSettled: () => {
              key.current = newIdempotencyKey()
            },
          },
        )
      }}
    >
      <Select
        label="Stands behind"
        options={options}
        value={target}
        onChange={(event) => setTarget(event.target.value)}
      />
      <div className="grid gap-3 tablet:grid-cols-3">
        <Select
          label="Where in the source"
          options={labels}
          value={label}
          onChange={(event) => setLabel(event.target.value)}
        />
        <Field label="Number" value={locator} maxLength={60} onChange={(event) => setLocator(event.target.value)} />
        <Field
          label="Quoted value"
          value={quoted}
          maxLength={200}
          onChange={(event) => setQuoted(event.target.value)}
        />
      </div>
      {link.error && <FaultText>{link.error.message}</FaultText>}
      <div className="flex flex-wrap gap-2">
        <Button
          type="submit"
          look="first"
          pending={link.isPending}
          unavailable={chosen() === null && 'Choose what it stands behind.'}
        >
          Attach
        </Button>
        <Button look="quiet" onClick={() => setOpen(false)}>
          Leave it
        </Button>
      </div>
    </form>
  )
}
