import { symbolParts } from '#src/lib/symbol-parts.ts'

/** A model's symbol in the mathematical italic, wherever it stands outside typed equations. */
export function ModelSymbol({ name }: { name: string }) {
  const { base, sub } = symbolParts(name)
  return (
    <i className="symbol">
      {base}
      {sub !== null && <sub>{sub}</sub>}
    </i>
  )
}
