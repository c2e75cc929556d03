/**
 * Collocation at the four Gauss points with polynomials of degree four, given by their values at five equidistant nodes
 * of an interval. At the ends of the intervals the error is of order h^8.
 *
 * Sources: de Boor & Swartz, SIAM J. Numer. Anal. 10 (1973) 582-606; Ascher, Mattheij & Russell, Numerical Solution of
 * Boundary Value Problems for Ordinary Differential Equations (1995), section 5.4.
 */

/** Gauss points, and so the degree of the polynomials. */
export const degree = 4
/** Values on one interval, both ends included. */
export const nodes = degree + 1

const inner = Math.sqrt(3 / 7 - (2 / 7) * Math.sqrt(6 / 5))
const outer = Math.sqrt(3 / 7 + (2 / 7) * Math.sqrt(6 / 5))

/** The Gauss points on [0, 1], ascending. */
export const gaussPoints = Float64Array.of((1 - outer) / 2, (1 - inner) / 2, (1 + inner) / 2, (1 + outer) / 2)

/** Weights of the closed Newton-Cotes rule (Boole) at the nodes: all positive, sum 1; exact to degree 5. */
export const nodeWeights = Float64Array.of(7 / 90, 32 / 90, 12 / 90, 32 / 90, 7 / 90)

/** Values of the five basis polynomials at `s` in [0, 1]. */
export function basisAt(s: number, out: Float64Array): void {
  for (let k = 0; k < nodes; k++) {
    let product = 1
    for (let l = 0; l < nodes; l++) if (l !== k) product *= (s * degree - l) / (k - l)
    out[k] = product
  }
}

/** Derivatives of the five basis polynomials with respect to s, at `s`. */
export function basisSlopeAt(s: number, out: Float64Array): void {
  for (let k = 0; k < nodes; k++) {
    let sum = 0
    for (let skip = 0; skip < nodes; skip++) {
      if (skip === k) continue
      let product = degree / (k - skip)
      for (let l = 0; l < nodes; l++) if (l !== k && l !== skip) product *= (s * degree - l) / (k - l)
      sum += product
    }
    out[k] = sum
  }
}

function table(points: ArrayLike<number>, fill: (s: number, out: Float64Array) => void): Float64Array {
  const out = new Float64Array(points.length * nodes)
  for (let i = 0; i < points.length; i++) fill(points[i] as number, out.subarray(i * nodes, (i + 1) * nodes))
  return out
}

/** Basis values at the Gauss points: [i * nodes + k]. */
export const valueAtGauss = table(gaussPoints, basisAt)
/** Basis slopes at the Gauss points: [i * nodes + k]. */
export const slopeAtGauss = table(gaussPoints, basisSlopeAt)
/** Basis slopes at the nodes: [l * nodes + k]. */
export const slopeAtNodes = table([0, 0.25, 0.5, 0.75, 1], basisSlopeAt)
/** Fourth derivative of a polynomial from its node values: a constant on the interval (s in [0, 1]). */
export const fourthDerivative = Float64Array.of(256, -1024, 1536, -1024, 256)
