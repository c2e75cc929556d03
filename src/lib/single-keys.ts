import { remember, remembered } from './storage.ts'

let on = remembered('single-keys') !== 'off'

/** Single-key shortcuts can be switched off (WCAG 2.1.4); on until then. */
export const singleKeysOn = (): boolean => on

export function setSingleKeys(choice: boolean): void {
  on = choice
  remember('single-keys', choice ? null : 'off')
}

/** How long a `0` waits for the number of a place. */
const waitMs = 1500
let placeSince = Number.NEGATIVE_INFINITY

/** Tells that `0` was pressed at `now`: the number after it names a place, not a section of the page. */
export function beginPlaceKey(now: number): void {
  placeSince = now
}

/** True while the number of a place is awaited. */
export const awaitsPlace = (now: number): boolean => now - placeSince < waitMs

export function endPlaceKey(): void {
  placeSince = Number.NEGATIVE_INFINITY
}

/** True where a key is meant for what has the focus: fields, editors, lists of choices, menus, dialogs. */
export function isTyping(target: EventTarget | null): boolean {
  if (!(target instanceof Element)) return false
  if (target.closest('dialog[open], [role="menu"], [role="dialog"], [role="listbox"]')) return true
  if (target.closest('input, textarea, select')) return !target.matches('input[type="checkbox"], input[type="radio"]')
  return target instanceof HTMLElement && target.isContentEditable
}
