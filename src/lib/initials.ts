/** Two letters for a person's ring: of the first and the last word of the name. */
export function initials(name: string): string {
  const words = name.trim().split(/\s+/)
  const first = words[0]?.charAt(0) ?? ''
  const last = words.length > 1 ? (words.at(-1)?.charAt(0) ?? '') : ''
  return `${first}${last}`.toUpperCase()
}

/** "Tove Marrowby" as "T. Marrowby", as in a title block. */
export function shortName(name: string): string {
  const words = name.trim().split(/\s+/)
  const [first] = words
  return words.length < 2 || first === undefined ? name : `${first.charAt(0)}. ${words.slice(1).join(' ')}`
}
