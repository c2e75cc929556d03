/** Letters typed for page codes ("run, SHM") as a list of capitals, each once. */
export function prefixesOf(typed: string): string[] {
  const words = typed.toUpperCase().split(/[\s,;]+/)
  return [...new Set(words.filter((word) => word !== ''))]
}
