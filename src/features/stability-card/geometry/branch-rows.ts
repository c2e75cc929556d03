import { growthRate } from './eigen-paths.ts'
import type { CardEvent } from './events.ts'
import type { CurvePoint, Piece } from './pieces.ts'

/** One row of the table behind the drawing. */
export interface BranchRow {
  key: string
  branch: number
  p: number
  value: number
  growth: number | null
  /** Null exactly where stability changes. */
  stable: boolean | null
  /** The onset, turning point or branch point that stands here. */
  event: CardEvent | null
  eigenvalues: CurvePoint['eigenvalues']
}

/** Rows of one piece at most: its ends, where stability changes, and points at equal steps between. */
const mostOfPiece = 25

function rowsOfPiece(piece: Piece, part: number, events: readonly CardEvent[]): BranchRow[] {
  const { points, branch, stable } = piece
  const every = Math.max(1, Math.ceil((points.length - 1) / (mostOfPiece - 1)))
  return points.flatMap((point, i) => {
    const ends = i === 0 ? piece.start : i === points.length - 1 ? piece.end : null
    const event = ends && events.find((one) => one.kind === ends.kind && one.index === ends.index)
    if (i % every !== 0 && i !== points.length - 1) return []
    const row = {
      key: `${branch}-${part}-${i}`,
      branch,
      p: point.p,
      value: point.value,
      growth: event ? 0 : growthRate(point.eigenvalues),
      stable: event ? null : stable,
      event: event ?? null,
      eigenvalues: point.eigenvalues,
    }
    return [row]
  })
}

/** The branches as rows, in the order they are walked. A place where two pieces meet stands once. */
export function branchRows(pieces: readonly Piece[], events: readonly CardEvent[]): BranchRow[] {
  const rows = pieces.flatMap((piece, part) => rowsOfPiece(piece, part, events))
  return rows.filter((row, i) => {
    const before = rows[i - 1]
    return !(before && before.branch === row.branch && before.p === row.p && before.value === row.value)
  })
}

export type SortKey = 'branch' | 'p' | 'value' | 'growth' | 'stable'

/** Sorted by one column; rows that are equal there keep their order. */
export function sortedRows(rows: readonly BranchRow[], key: SortKey, rising: boolean): BranchRow[] {
  if (key === 'branch') return [...rows]
  const read = (row: BranchRow): number => {
    if (key === 'stable') return row.stable === null ? 0.5 : Number(row.stable)
    return row[key] ?? Number.NEGATIVE_INFINITY
  }
  const sign = rising ? 1 : -1
  return [...rows].sort((a, b) => sign * (read(a) - read(b)) || 0)
}
