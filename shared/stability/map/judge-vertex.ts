import type { Verdict } from '#shared/model/card-document.ts'
import { type Sample, sampleAt } from '../corrector.ts'
import { createForms, type Forms } from '../forms.ts'
import { place } from '../frame.ts'
import type { LocatedHopf } from '../hopf-point.ts'
import { criticalPair, cubicTerm } from '../normal-form.ts'
import { secondLyapunov } from '../second-lyapunov.ts'
import { judgeHopf } from '../verdict.ts'
import { spectrumAt } from './beside-the-pair.ts'
import type { CurveVertex } from './curve.ts'
import { enter, type Plane } from './plane.ts'

/** What is said of a point on an onset curve. */
export interface VertexJudgement {
  readonly omega: number
  readonly verdict: Verdict
  readonly operating: boolean
  /** Re c1 / omega with <q, q> = 1, or null where it has no value. */
  readonly firstLyapunov: number | null
}

/** Judges points of onset curves by the rules of the card's own list. */
export interface Judge {
  /** Null where the spectrum cannot be had or no more work may be done. */
  judge(vertex: CurveVertex, omega: number): VertexJudgement | null
  /** Re c1 / omega with <q, q> = 1; null at a kink and where another eigenvalue leaves it without a value. */
  firstLyapunov(vertex: CurveVertex, omega: number): number | null
  /** The second Lyapunov coefficient, see second-lyapunov.ts. */
  secondLyapunov(vertex: CurveVertex, omega: number): number | null
}

/** How well a point on a traced curve is known: Newton has converged to rounding. */
const pointError = 1e-14

/** Makes the judge of a plane. */
export function createJudge(plane: Plane): Judge {
  const { frame } = plane
  const forms: Forms = createForms(frame)

  function located(vertex: CurveVertex, omega: number): LocatedHopf | null {
    if (frame.budget.spent()) return null
    const spectrum = spectrumAt(plane, vertex.y)
    if (!spectrum || !(omega > 0)) return null
    const z = enter(plane, vertex.y)
    const along = new Float64Array(plane.n + 1)
    along[plane.n] = 1
    // where the branch turns in the control it still has a tangent, only not this one
    const sample: Sample = sampleAt(frame, z, along) ?? { z, t: along, sign: 0, spectrum }
    return { sample: { ...sample, spectrum }, omega, error: pointError }
  }

  const atKink = (vertex: CurveVertex): boolean => {
    if (frame.model.smooth) return false
    place(frame, enter(plane, vertex.y))
    return frame.model.kinkAt(frame.x, frame.parameters, 1e-8)
  }

  return {
    judge(vertex, omega) {
      const point = located(vertex, omega)
      if (!point) return null
      const judged = judgeHopf(frame, forms, { ...point, segment: 0, before: -1, after: 1 })
      const { verdict, operating, firstLyapunov } = judged
      return { omega, verdict, operating, firstLyapunov }
    },
    firstLyapunov(vertex, omega) {
      const point = located(vertex, omega)
      const pair = point && !atKink(vertex) ? criticalPair(frame, point) : null
      const term = point && pair && cubicTerm(frame, forms, point, pair)
      return term ? term.c1.re / pair.size / omega : null
    },
    secondLyapunov(vertex, omega) {
      const point = located(vertex, omega)
      const pair = point && criticalPair(frame, point)
      return pair ? secondLyapunov(frame, point, pair) : null
    },
  }
}
