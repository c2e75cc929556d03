import { CircleAlert } from 'lucide-react'
import { type ComponentProps, type ReactNode, useId } from 'react'
import { classes } from '#src/lib/class-names.ts'

/** Text of a fault: always with its icon, never by hue alone. */
export function FaultText({ id, children }: { id?: string; children: ReactNode }) {
  return (
    <p id={id} className="flex items-start gap-1.5 text-note font-[620] text-fault">
      <CircleAlert aria-hidden className="mt-px size-4 shrink-0" />
      <span>{children}</span>
    </p>
  )
}

interface FieldParts {
  label: string
  hint?: ReactNode
  error?: string | null
  /** The label is read but not shown: where a table's head or the sentence around says it. */
  labelHidden?: boolean
}

/** The look of a field; its edge is the caller's: `border-line`, or `border-fault` with a fault. */
export const fieldBox =
  'w-full min-h-11 rounded-control border bg-well px-2.5 text-body text-ink bench:min-h-8 read-only:text-ink-2 disabled:text-ink-3'

/** Wires label, hint and fault to a control; `render` gets the attributes that do it. */
export function Labelled(
  props: FieldParts & {
    className?: string
    render: (wiring: { id: string; 'aria-describedby'?: string; 'aria-invalid'?: true }) => ReactNode
  },
) {
  const { label, hint, error, labelHidden = false, render, className } = props
  const id = useId()
  const described = [hint ? `${id}-hint` : null, error ? `${id}-fault` : null].filter(Boolean).join(' ')
  return (
    <div className={classes('grid content-start gap-1', className)}>
      <label htmlFor={id} className={labelHidden ? 'sr-only' : 'text-label text-ink-2'}>
        {label}
      </label>
      {render({ id, 'aria-describedby': described || undefined, 'aria-invalid': error ? true : undefined })}
      {hint && (
        <p id={`${id}-hint`} className="text-note text-ink-2">
          {hint}
        </p>
      )}
      {error && <FaultText id={`${id}-fault`}>{error}</FaultText>}
    </div>
  )
}

export type FieldProps = FieldParts & ComponentProps<'input'> & { figures?: boolean }

/** One line of input with its label, hint and fault. */
export function Field({ label, hint, error, labelHidden, className, figures = false, ...rest }: FieldProps) {
  return (
    <Labelled
      label={label}
      hint={hint}
      error={error}
      labelHidden={labelHidden}
      className={className}
      render={(wiring) => (
        <input
          {...rest}
          {...wiring}
          className={classes(fieldBox, error ? 'border-fault' : 'border-line', figures && 'figures text-note')}
        />
      )}
    />
  )
}

export type TextFieldProps = FieldParts & ComponentProps<'textarea'> & { figures?: boolean }

/** Several lines of input. */
export function TextField({ label, hint, error, labelHidden, className, figures = false, ...rest }: TextFieldProps) {
  return (
    <Labelled
      label={label}
      hint={hint}
      error={error}
      labelHidden={labelHidden}
      className={className}
      render={(wiring) => (
        <textarea
          rows={4}
          {...rest}
          {...wiring}
          className={classes(fieldBox, 'py-2', error ? 'border-fault' : 'border-line', figures && 'figures text-note')}
        />
      )}
    />
  )
}
