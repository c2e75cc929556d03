/**
 * What somebody has typed and not sent, kept in this tab for that person only, so that a session that ends does not cost
 * it. Signing out makes the browser forget it. A browser that refuses storage keeps nothing; nothing else changes.
 */
const nameOf = (person: number, place: string) => `brinkbook.kept.${person}.${place}`

export function keptText(person: number, place: string): string | null {
  try {
    return sessionStorage.getItem(nameOf(person, place))
  } catch {
    return null
  }
}

/** Null forgets it. */
export function keepText(person: number, place: string, text: string | null): void {
  try {
    if (text === null) sessionStorage.removeItem(nameOf(person, place))
    else sessionStorage.setItem(nameOf(person, place), text)
  } catch {
    // Refused: it stays until the screen is left.
  }
}
