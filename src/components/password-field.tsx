import { useState } from 'react'
import { classes } from '#src/lib/class-names.ts'
import { type FieldProps, fieldBox, Labelled } from './field.tsx'

/** A password, hidden until asked for. `autoComplete` says whether it is the present one or a new one. */
export function PasswordField(
  props: Omit<FieldProps, 'type' | 'figures'> & { autoComplete: 'current-password' | 'new-password' },
) {
  const { label, labelHidden, hint, error, className, ...rest } = props
  const [shown, setShown] = useState(false)
  return (
    <Labelled
      label={label}
      labelHidden={labelHidden}
      hint={hint}
      error={error}
      className={className}
      render={(wiring) => (
        <div className="relative">
          <input
            {...rest}
            {...wiring}
            type={shown ? 'text' : 'password'}
            spellCheck={false}
            autoCapitalize="none"
            className={classes(fieldBox, 'pr-16', error ? 'border-fault' : 'border-line')}
          />
          <button
            type="button"
            aria-pressed={shown}
            aria-label={`Show ${label.toLowerCase()}`}
            onClick={() => setShown(!shown)}
            className="absolute inset-y-0.5 right-0.5 min-w-14 rounded-control px-2 text-label text-ink-2 hover:bg-pencil-tint hover:text-ink"
          >
            {shown ? 'Hide' : 'Show'}
          </button>
        </div>
      )}
    />
  )
}
