import { useState } from 'react'
import { Field, type FieldProps } from './field.tsx'

/** A password, hidden until asked for. `autoComplete` says whether it is the present one or a new one. */
export function PasswordField(props: Omit<FieldProps, 'type'> & { autoComplete: 'current-password' | 'new-password' }) {
  const [shown, setShown] = useState(false)
  return (
    <div className="relative">
      <Field {...props} type={shown ? 'text' : 'password'} spellCheck={false} autoCapitalize="none" />
      <button
        type="button"
        aria-pressed={shown}
        aria-label={`Show ${props.label.toLowerCase()}`}
        onClick={() => setShown(!shown)}
        className="link absolute top-0 right-0 min-h-6 text-label"
      >
        {shown ? 'Hide' : 'Show'}
      </button>
    </div>
  )
}
