import { growthRate } from './eigen-paths.ts'
import { betweenPoints, type CurvePoint, type Piece } from './pieces.ts'

/** A steady state at one value of the control, read between two computed points of its branch. */
export interface StateAt extends CurvePoint {
  branch: number
  stable: boolean
  /** Largest real part; null where the branch carries no eigenvalues. */
  growth: number | null
}

/** The steady states on the branches at control value `p`, lowest observed value first. */
export function statesAt(pieces: readonly Piece[], p: number): StateAt[] {
  const found: StateAt[] = []
  for (const piece of pieces) {
    for (let i = 1; i < piece.points.length; i++) {
      const a = piece.points[i - 1]
      const b = piece.points[i]
      if (!a || !b || (a.p - p) * (b.p - p) > 0) continue
      const share = a.p === b.p ? 0 : (p - a.p) / (b.p - a.p)
      const point = betweenPoints(a, b, share)
      // A value that is a computed point belongs to the segments on both sides of it: one state, not two.
      const onPoint = share === 0 || share === 1
      const twin = onPoint && found.find((other) => other.branch === piece.branch && near(other, point))
      if (twin) {
        // Exactly at the end of a stable piece the real part is zero: that is not stable.
        twin.stable &&= piece.stable
        continue
      }
      found.push({ ...point, branch: piece.branch, stable: piece.stable, growth: growthRate(point.eigenvalues) })
    }
  }
  return found.sort((a, b) => a.value - b.value || a.branch - b.branch)
}

function near(a: CurvePoint, b: CurvePoint): boolean {
  return Object.entries(a.state).every(([symbol, value]) => {
    const other = b.state[symbol] ?? value
    return Math.abs(value - other) <= 1e-9 * Math.max(Math.abs(value), Math.abs(other), Number.MIN_VALUE)
  })
}
