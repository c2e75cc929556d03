/** What this browser remembers. A browser that refuses storage remembers nothing; nothing else changes. */
export function remembered(key: string): string | null {
  try {
    return localStorage.getItem(`brinkbook.${key}`)
  } catch {
    return null
  }
}

export function remember(key: string, value: string | null): void {
  try {
    if (value === null) localStorage.removeItem(`brinkbook.${key}`)
    else localStorage.setItem(`brinkbook.${key}`, value)
  } catch {
    // Refused: the choice holds until the page is left.
  }
}
