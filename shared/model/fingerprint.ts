import { canonicalJson } from './canonical-json.ts'
import type { ModelDocument } from './document.ts'
import { sha256 } from './sha256.ts'

/**
 * The fingerprint of what a card depends on: SHA-256 of the RFC 8785 form of format, version, timeUnit, the equations with
 * LF line ends, the numbers and units of parameters and states in document order, control, secondControl and observed.
 * Absent members stay absent; titles, meanings, citations and notes do not count.
 *
 * @throws {RangeError} for a document `readModelDocument` would have refused (numbers that are not finite, half characters).
 */
export function fingerprint(document: ModelDocument): string {
  const { format, version, timeUnit, equations, parameters, states, control, secondControl, observed } = document
  const counted = {
    format,
    version,
    timeUnit,
    equations: equations.replace(/\r\n?/g, '\n'),
    parameters: parameters.map(({ symbol, value, low, high, unit, uncertainty }) => ({
      symbol,
      value,
      low,
      high,
      unit,
      uncertainty,
    })),
    states: states.map(({ symbol, low, high, start, unit }) => ({ symbol, low, high, start, unit })),
    control,
    secondControl,
    observed,
  }
  return `sha256:${sha256(canonicalJson(counted))}`
}
