import type { StabilityCard } from '#shared/model/card-document.ts'
import type { StateAt } from './states-at.ts'

/**
 * The branch the eigenvalues are shown of: the one that runs, as long as it reaches the running point; else one that is
 * stable there; else one that reaches it; else the one that runs.
 */
export function shownBranch(card: StabilityCard, states: readonly StateAt[]): number {
  const own = card.window?.branch ?? card.hopf?.find((point) => point.operating)?.branch ?? card.branches?.[0]?.id ?? 0
  if (states.some((state) => state.branch === own)) return own
  return (states.find((state) => state.stable) ?? states[0])?.branch ?? own
}
