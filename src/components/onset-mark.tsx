export interface OnsetMarkProps {
  x: number
  y: number
  kind: 'hard' | 'soft' | 'undecided'
  /** The fall is towards lower values: step and ramp are drawn the other way round. */
  mirrored?: boolean
  /** A pair that crosses where nothing stable is lost. */
  hollow?: boolean
  /** 1 is the 12 px mark of the drawings. */
  scale?: number
}

const shape = { hard: 'M-6 -6H6V0.2H0.4V6H-6z', soft: 'M-7 5.4H7L-7 -6z' } as const
const hue = { hard: 'var(--color-hard)', soft: 'var(--color-soft)', undecided: 'var(--color-open)' } as const

/** The mark of an onset, for use inside an SVG: an undercut step or a ramp that faces the fall; a circle where undecided. */
export function OnsetMark({ x, y, kind, mirrored = false, hollow = false, scale = 1 }: OnsetMarkProps) {
  const colour = hue[kind]
  if (kind === 'undecided') {
    return <circle cx={x} cy={y} r={4.6 * scale} fill="var(--color-sheet)" stroke={colour} strokeWidth={2 * scale} />
  }
  const transform = `translate(${x} ${y}) scale(${mirrored ? -scale : scale} ${scale})`
  return (
    <g transform={transform}>
      <path d={shape[kind]} fill="var(--color-sheet)" stroke="var(--color-sheet)" strokeWidth="3" />
      <path
        d={shape[kind]}
        fill={hollow ? 'var(--color-sheet)' : colour}
        stroke={hollow ? colour : 'none'}
        strokeWidth="1.6"
      />
    </g>
  )
}
