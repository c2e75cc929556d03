import { remember, remembered } from './storage.ts'

/** The stored choice is applied before the first paint by public/theme.js; this changes it. */
export const appearances = ['machine', 'light', 'dark'] as const
export type Appearance = (typeof appearances)[number]

export function appearance(): Appearance {
  const stored = remembered('appearance')
  return stored === 'light' || stored === 'dark' ? stored : 'machine'
}

export function setAppearance(choice: Appearance): void {
  remember('appearance', choice === 'machine' ? null : choice)
  if (choice === 'machine') delete document.documentElement.dataset.theme
  else document.documentElement.dataset.theme = choice
}
