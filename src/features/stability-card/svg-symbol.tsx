import { symbolParts } from '#src/lib/symbol-parts.ts'

/** A model's symbol inside an SVG text, in the mathematical italic; a subscript is lowered and the line taken up again. */
export function SvgSymbol({ name }: { name: string }) {
  const { base, sub } = symbolParts(name)
  return (
    <>
      <tspan fontFamily="var(--font-symbol)" fontStyle="italic" fontSize="1.13em">
        {base}
      </tspan>
      {sub !== null && (
        <>
          <tspan fontFamily="var(--font-symbol)" fontStyle="italic" fontSize="0.8em" dy="0.25em">
            {sub}
          </tspan>
          <tspan dy="-0.2em">{'\u200b'}</tspan>
        </>
      )}
    </>
  )
}
