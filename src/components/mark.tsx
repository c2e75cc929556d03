/** The mark: a leaf over the edge, the undercut block below. Decorative unless `label` is given. */
export function Mark({ size = 24, label }: { size?: number; label?: string }) {
  return (
    <svg viewBox="0 0 32 32" width={size} height={size} role="img" aria-label={label} aria-hidden={label === undefined}>
      <path d="M2 6H14.5C23 6 28.4 12.6 29 28.5" fill="none" stroke="currentColor" strokeWidth="4.4" />
      <path d="M2 12H20V18H12V28.5H2z" fill="currentColor" />
    </svg>
  )
}
