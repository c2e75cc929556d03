import { remember, remembered } from './storage.ts'

let on = remembered('single-keys') !== 'off'

/** Single-key shortcuts can be switched off (WCAG 2.1.4); on until then. */
export const singleKeysOn = (): boolean => on

export function setSingleKeys(choice: boolean): void {
  on = choice
  remember('single-keys', choice ? null : 'off')
}

/** True where a key is meant for what has the focus: fields, editors, lists of choices, menus, dialogs. */
export function isTyping(target: EventTarget | null): boolean {
  if (!(target instanceof Element)) return false
  if (target.closest('dialog[open], [role="menu"], [role="dialog"], [role="listbox"]')) return true
  if (target.closest('input, textarea, select')) return !target.matches('input[type="checkbox"], input[type="radio"]')
  return target instanceof HTMLElement && target.isContentEditable
}
