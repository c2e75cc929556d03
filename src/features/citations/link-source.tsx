import { useRef, useState } from 'react'
import type { DraftTargets } from '#shared/api/drafts.ts'
import type { FormattedSource, SourceTarget } from '#shared/api/sources.ts'
import { linkLabels } from '#shared/model/locators.ts'
import { useLinkSource } from '#src/api/sources.ts'
import { Button, LinkButton } from '#src/components/button.tsx'
import { FaultText, Field } from '#src/components/field.tsx'
import { Select } from '#src/components/select.tsx'
import { newIdempotencyKey } from '#src/lib/idempotency-key.ts'

const labels = [
  { value: '', label: 'no locator' },
  ...linkLabels.map((value) => ({ value: value as string, label: value as string })),
]

/** What a source may stand behind, as the select names it: a symbol, or a line by the anchor that follows it. */
export function targetOptions({
  symbols,
  lines,
}: DraftTargets): { value: string; label: string; target: SourceTarget }[] {
  return [
    ...symbols.map(({ symbol, meaning }) => ({
      value: `symbol ${symbol}`,
      label: meaning ? `${symbol}, ${meaning}` : symbol,
      target: { kind: 'parameter' as const, symbol },
    })),
    ...lines.map(({ line, text, anchor }) => ({
      value: `line ${anchor}`,
      label: `line ${line}: ${text.slice(0, 60)}`,
      target: { kind: 'line' as const, line, anchor },
    })),
  ]
}

export interface LinkSourceProps {
  code: string
  source: FormattedSource
  targets: DraftTargets
  /** The form was opened: the draft may have changed since it was read. */
  onOpen: () => void
}

/** Attaches a source to a symbol or an equation line, with where in the source it stands and what it says there. */
export function LinkSource({ code, source, targets, onOpen }: LinkSourceProps) {
  const [open, setOpen] = useState(false)
  const [target, setTarget] = useState('')
  const [label, setLabel] = useState('')
  const [locator, setLocator] = useState('')
  const [quoted, setQuoted] = useState('')
  const key = useRef(newIdempotencyKey())
  const link = useLinkSource(code)
  if (!open) {
    const show = () => {
      onOpen()
      setOpen(true)
    }
    return <LinkButton onClick={show}>Attach to a symbol or line</LinkButton>
  }
  const options = targetOptions(targets)
  const chosen = options.find(({ value }) => value === target)?.target ?? null
  return (
    <form
      className="mt-2 grid gap-3 bg-well p-3"
      onSubmit={(event) => {
        event.preventDefault()
        if (!chosen) return
        const found = linkLabels.find((candidate) => candidate === label)
        link.mutate(
          {
            source: source.id,
            key: key.current,
            body: {
              target: chosen,
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
        options={[{ value: '', label: 'Choose' }, ...options]}
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
          unavailable={chosen === null && 'Choose what it stands behind.'}
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
