const powers = '⁻⁰¹²³⁴⁵⁶⁷⁸⁹'
const plain = '-0123456789'

/** A figure whose power of ten is raised by the browser: the mono face has no raised digits of its own. */
export function FigureText({ text }: { text: string }) {
  const match = /^(.*)× 10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)(.*)$/.exec(text)
  if (!match) return text
  const [, before = '', power = '', after = ''] = match
  const digits = [...power].map((character) => plain.charAt(powers.indexOf(character)).replace('-', '\u2212')).join('')
  return (
    <>
      {before}×10<sup className="text-[0.7em]">{digits}</sup>
      {after}
    </>
  )
}
