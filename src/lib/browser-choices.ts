import { setSingleKeys, singleKeysOn } from './single-keys.ts'
import { appearance, setAppearance } from './theme.ts'

/**
 * Signing out makes the browser forget what it stored, so that nothing of the person stays. Appearance and single keys
 * belong to the machine, not to the person: they are written again from what holds on this page.
 */
export function keepBrowserChoices(): void {
  setAppearance(appearance())
  setSingleKeys(singleKeysOn())
}
