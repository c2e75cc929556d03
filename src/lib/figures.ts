/**
 * A number in four significant digits without trailing zeros, with the true minus sign: for axis ends and other places
 * where nothing is rounded to a safe side. Very large and very small ones as 1.2×10^n in figures a reader can say.
 */
export function shortFigure(value: number): string {
  if (!Number.isFinite(value)) return ''
  const rounded = Number(value.toPrecision(4))
  const size = Math.abs(rounded)
  const text = size !== 0 && (size >= 1e6 || size < 1e-4) ? powerOfTen(rounded) : String(rounded)
  return text.replaceAll('-', '\u2212')
}

const raised = new Map([...'-0123456789'].map((character, index) => [character, '⁻⁰¹²³⁴⁵⁶⁷⁸⁹'.charAt(index)]))

function powerOfTen(value: number): string {
  const [digits = '', exponent = '0'] = value.toExponential().split('e')
  const power = [...String(Number(exponent))].map((character) => raised.get(character) ?? '').join('')
  return digits === '1' ? `10${power}` : `${digits}×10${power}`
}
