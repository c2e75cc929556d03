/**
 * How much work an analysis may still do. Work is counted (evaluations of the linearised model), not timed, so that one
 * document gives one card on every machine; `shouldStop` is asked often enough for a worker to answer within 50 ms.
 */
export interface Budget {
  /** Counts `units` of work done; true where no more should be done. */
  spend(units: number): boolean
  /** True where no more should be done. */
  spent(): boolean
  /** Why: asked to stop from outside, or the allowance is used up. Null while work may go on. */
  reason(): 'stopped' | 'work' | null
}

/** @param allowance  units of work; one is one evaluation of F and its Jacobian. */
export function createBudget(allowance: number, shouldStop?: () => boolean): Budget {
  let left = allowance
  let sinceAsked = 0
  let reason: 'stopped' | 'work' | null = null
  return {
    spend(units) {
      left -= units
      sinceAsked += units
      if (reason === null && left <= 0) reason = 'work'
      if (sinceAsked >= 64) {
        sinceAsked = 0
        if (reason === null && shouldStop?.()) reason = 'stopped'
      }
      return reason !== null
    },
    spent: () => reason !== null,
    reason: () => reason,
  }
}
