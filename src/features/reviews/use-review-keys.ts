import type { RefObject } from 'react'
import { useSingleKeys } from '#src/hooks/use-single-keys.ts'

/** Where the focus goes from `current`, round and round; -1: none of them has it. */
export function nextPlace(count: number, current: number, step: 1 | -1): number {
  if (count === 0) return -1
  if (current < 0) return step === 1 ? 0 : count - 1
  return (current + step + count) % count
}

/**
 * `n` and `p` lead through the changes inside `area` (elements with `data-change`), `m` to the remark. They are off while
 * something is typed, and no single key approves.
 */
export function useReviewKeys(area: RefObject<HTMLElement | null>): void {
  useSingleKeys((key) => {
    const root = area.current
    if (!root) return false
    if (key === 'm') return toRemark(root)
    if (key !== 'n' && key !== 'p') return false
    const changes = [...root.querySelectorAll<HTMLElement>('[data-change]')].filter((one) => one.offsetParent !== null)
    const current = changes.findIndex((one) => one.contains(document.activeElement))
    return focusOn(changes[nextPlace(changes.length, current, key === 'n' ? 1 : -1)] ?? null)
  })
}

/** Puts the focus where a remark is written; false where none can be. */
export const toRemark = (area: HTMLElement | null): boolean =>
  focusOn(area?.querySelector<HTMLElement>('[data-remark]') ?? null)

function focusOn(element: HTMLElement | null): boolean {
  if (!element) return false
  element.focus({ preventScroll: true })
  element.scrollIntoView({ block: 'center' })
  return true
}
