import { fromSuperscript } from '#shared/stability/numbers.ts'

/** A figure whose power of ten is raised by the browser: the mono face has no raised digits of its own. */
export function FigureText({ text }: { text: string }) {
  const match = /^(.*)× 10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)(.*)$/.exec(text)
  if (!match) return text
  const [, before = '', power = '', after = ''] = match
  return (
    <>
      {before}×10<sup className="text-[0.7em]">{fromSuperscript(power)}</sup>
      {after}
    </>
  )
}
