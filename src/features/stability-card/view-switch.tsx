import { useEffect } from 'react'
import { classes } from '#src/lib/class-names.ts'
import { isTyping, singleKeysOn } from '#src/lib/single-keys.ts'

const options = [
  { value: 'drawing', label: 'Drawing' },
  { value: 'table', label: 'Table' },
] as const
type View = (typeof options)[number]['value']

/** Drawing or Table: two words, the lit one bold over a pencil line. */
export function ViewSwitch({
  label,
  value,
  onChange,
  shortcut,
}: {
  label: string
  value: View
  onChange: (view: View) => void
  /** A single key that switches, while nobody types and single keys are on. */
  shortcut?: string
}) {
  useEffect(() => {
    if (!shortcut) return
    const onKey = (event: KeyboardEvent) => {
      if (event.key !== shortcut || event.ctrlKey || event.metaKey || event.altKey || event.defaultPrevented) return
      if (!singleKeysOn() || isTyping(event.target)) return
      event.preventDefault()
      onChange(value === 'drawing' ? 'table' : 'drawing')
    }
    window.addEventListener('keydown', onKey)
    return () => window.removeEventListener('keydown', onKey)
  }, [shortcut, value, onChange])
  return (
    <div role="group" aria-label={label} className="flex gap-3">
      {options.map((option) => (
        <button
          key={option.value}
          type="button"
          aria-pressed={option.value === value}
          onClick={() => onChange(option.value)}
          className={classes(
            'min-h-11 border-b-[3px] px-0.5 text-note bench:min-h-7',
            option.value === value ? 'border-pencil font-[640]' : 'border-transparent text-ink-2 hover:border-rule',
          )}
        >
          {option.label}
        </button>
      ))}
    </div>
  )
}
