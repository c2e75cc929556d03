/** A revision's MAJOR.MINOR in the triangle of a drawing's revision table. `mark` is the full mark, 2.1.0. */
export function RevisionTriangle({ mark, size = 32 }: { mark: string; size?: number }) {
  const shown = mark.split('.').slice(0, 2).join('.')
  // Long marks (12.34) shrink so that they stay between the sides.
  const fontSize = shown.length <= 3 ? 11.5 : Math.max(6.5, 34 / shown.length)
  return (
    <svg
      viewBox="0 0 34 30"
      width={size}
      height={(size * 30) / 34}
      role="img"
      aria-label={`Revision ${mark}`}
      className="shrink-0"
    >
      <path d="M17 2 32.2 28.2H1.8z" fill="none" stroke="currentColor" strokeWidth="1.8" strokeLinejoin="round" />
      <text x="17" y="24.6" textAnchor="middle" fontSize={fontSize} fontWeight="640" fill="currentColor">
        {shown}
      </text>
    </svg>
  )
}

/** The small triangle in the margin of a line or a parameter that changed since the revision in force. `label` is empty where the text beside it says so already. */
export function ChangeTriangle({ mark, label }: { mark: string; label: string }) {
  const shown = mark.split('.').slice(0, 2).join('.')
  return (
    <svg
      viewBox="0 0 34 30"
      width="22"
      height="19.4"
      role="img"
      aria-label={label}
      aria-hidden={label === ''}
      className="shrink-0"
    >
      <path d="M17 2 32.2 28.2H1.8z" fill="none" stroke="currentColor" strokeWidth="2" strokeLinejoin="round" />
      <text
        x="17"
        y="25"
        textAnchor="middle"
        fontSize={shown.length <= 3 ? 12 : 8.5}
        fontWeight="640"
        fill="currentColor"
      >
        {shown}
      </text>
    </svg>
  )
}
