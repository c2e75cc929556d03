import { remember } from './storage.ts'

/** The stored choice is applied before the first paint by public/theme.js; this changes it. */
export const appearances = ['machine', 'light', 'dark'] as const
export type Appearance = (typeof appearances)[number]

/** What holds on this page. */
export function appearance(): Appearance {
  const { theme } = document.documentElement.dataset
  return theme === 'light' || theme === 'dark' ? theme : 'machine'
}

export function setAppearance(choice: Appearance): void {
  remember('appearance', choice === 'machine' ? null : choice)
  if (choice === 'machine') delete document.documentElement.dataset.theme
  else document.documentElement.dataset.theme = choice
}
