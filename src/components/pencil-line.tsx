/**
 * Progress: a pencil line along a rule with an ink tick at its head. `share` from 0 to 1; without it the work has begun
 * and its length is not known: the line then has no head and the words carry the meaning.
 */
export function PencilLine({
  label,
  share,
  state = 'running',
}: {
  label: string
  share?: number
  state?: 'running' | 'paused'
}) {
  const percent = share === undefined ? undefined : Math.round(Math.min(1, Math.max(0, share)) * 100)
  const known = percent === undefined ? {} : { 'aria-valuenow': percent, 'aria-valuemin': 0, 'aria-valuemax': 100 }
  const x = 1 + (percent ?? 30) * 0.98
  return (
    <div role="progressbar" aria-label={label} aria-valuetext={state === 'paused' ? 'paused' : undefined} {...known}>
      <svg aria-hidden className="block w-full" height="14" viewBox="0 0 100 14" preserveAspectRatio="none">
        <path d="M1 7H99M1 3V11M99 3V11" stroke="var(--color-line)" strokeWidth="1" vectorEffect="non-scaling-stroke" />
        <path d={`M1 7H${x}`} stroke="var(--color-pencil)" strokeWidth="6" vectorEffect="non-scaling-stroke" />
        {percent !== undefined && (
          <path d={`M${x} 1V13`} stroke="var(--color-ink)" strokeWidth="2.4" vectorEffect="non-scaling-stroke" />
        )}
        {percent !== undefined && state === 'paused' && (
          <path d={`M${x - 1.5} 1V13`} stroke="var(--color-ink)" strokeWidth="2.4" vectorEffect="non-scaling-stroke" />
        )}
      </svg>
    </div>
  )
}

/** What stands on a page while its data are read: the line and the words, announced politely. */
export function Waiting({ what }: { what: string }) {
  return (
    <div role="status" className="grid max-w-sm gap-2 p-6 text-ink-2">
      <span>{what}</span>
      <PencilLine label={what} />
    </div>
  )
}
