import { z } from 'zod'

/**
 * The stability card as it travels and is stored (`format: "brinkbook-card"`, version 1). A part that was not asked
 * for is absent; a part that was computed and is empty is []. Every number is finite.
 *
 * Units: control `p` in the control's unit; states in their own; rates, `omega` in radians per time unit.
 */
const finite = z.number()
const complex = z.object({ re: finite, im: finite })
const state = z.record(z.string(), finite)

export const verdicts = ['soft', 'hard', 'degenerate', 'undetermined'] as const

export const steadyStateKinds = [
  'stable spiral',
  'unstable spiral',
  'stable node',
  'unstable node',
  'saddle',
  'saddle-focus',
  'centre',
  'stable star',
  'unstable star',
  'degenerate',
] as const

export const steadyState = z.object({
  state,
  eigenvalues: z.array(complex),
  stable: z.boolean(),
  kind: z.enum(steadyStateKinds),
  residual: finite,
})

/** `eigenvalues` along the branch feed the eigenvalue plane; `observed` is the observed quantity at the point. */
export const branchPointOnCurve = z.object({
  p: finite,
  state,
  stable: z.boolean(),
  observed: finite,
  eigenvalues: z.array(complex),
})

export const branch = z.object({
  id: z.number().int().nonnegative(),
  points: z.array(branchPointOnCurve),
  /** Where each end of the branch lies: at the range's end, where it leaves the box (and through which state), ... */
  ends: z.array(
    z.object({
      kind: z.enum(['range-end', 'box-left', 'branch-point', 'closed', 'budget', 'not-finite']),
      p: finite,
      symbol: z.string().optional(),
    }),
  ),
})

export const hopfPoint = z.object({
  p: finite,
  state,
  branch: z.number().int().nonnegative(),
  omega: finite,
  period: finite,
  crossing: finite,
  firstLyapunov: finite.nullable(),
  cubic: finite.nullable(),
  cubicError: finite.nullable(),
  shift: finite.nullable(),
  verdict: z.enum(verdicts),
  operating: z.boolean(),
  cycleSide: z.enum(['above', 'below']).nullable(),
  amplitudeCoefficient: finite.nullable(),
  secondLyapunov: finite.nullable(),
  proved: z.boolean(),
})

const windowEnd = z.object({
  kind: z.enum(['onset', 'fold', 'branch-point', 'box-left', 'range-end']),
  /** Position in `hopf` (kind onset), `folds` or `branchPoints`. */
  index: z.number().int().nonnegative().optional(),
  verdict: z.enum(verdicts).optional(),
  returnAt: finite.optional(),
  jumpTo: z
    .object({ kind: z.enum(['cycle', 'steady', 'irregular', 'leaves-box']), amplitude: finite.optional() })
    .optional(),
})

export const runningWindow = z.object({
  branch: z.number().int().nonnegative(),
  from: finite,
  to: finite,
  low: windowEnd,
  high: windowEnd,
  coexisting: z.array(z.object({ from: finite, to: finite, with: z.string() })).optional(),
  toleratedKick: z
    .array(z.object({ p: finite, amplitude: finite.optional(), kick: z.record(z.string(), finite).optional() }))
    .optional(),
})

/**
 * `closed`: the branch comes back to where it was entered (a closed branch that meets no onset in range);
 * `period-doubling`: a branch of doubled period meets the branch it springs from.
 */
const cycleEnd = z.object({
  kind: z.enum(['range-end', 'box-left', 'onset', 'homoclinic', 'budget', 'closed', 'period-doubling']),
  p: finite,
})

const cyclePoint = z.object({
  p: finite,
  period: finite,
  amplitude: finite,
  min: finite,
  max: finite,
  stable: z.boolean(),
  multipliers: z.array(complex),
})

export const warningCodes = [
  'value-outside-range',
  'not-finite-here',
  'not-smooth',
  'observed-silent',
  'degenerate',
  'unit-mismatch',
  'bad-unit',
  'searched-not-proved',
  'continuum-of-steady-states',
  'branch-left-box',
  'budget-spent',
  'no-steady-state',
  'no-window',
  'no-second-control',
] as const

export const cardWarning = z.object({
  code: z.enum(warningCodes),
  message: z.string(),
  line: z.number().int().positive().optional(),
  path: z.string().optional(),
})
export type CardWarning = z.infer<typeof cardWarning>

export const stabilityCard = z.object({
  format: z.literal('brinkbook-card'),
  version: z.literal(1),
  engine: z.string(),
  fingerprint: z.string(),
  control: z.string(),
  observed: z.string(),
  steadyStates: z.array(steadyState).optional(),
  steadyStatesComplete: z.boolean().optional(),
  branches: z.array(branch).optional(),
  folds: z.array(z.object({ p: finite, state })).optional(),
  branchPoints: z
    .array(z.object({ p: finite, state, kind: z.enum(['transcritical', 'pitchfork', 'other']) }))
    .optional(),
  hopf: z.array(hopfPoint).optional(),
  cycles: z
    .array(
      z.object({
        hopf: z.number().int().nonnegative().nullable(),
        /** How it begins, where that is not an onset. */
        start: cycleEnd.optional(),
        end: cycleEnd,
        points: z.array(cyclePoint),
      }),
    )
    .optional(),
  cycleFolds: z
    .array(z.object({ hopf: z.number().int().nullable(), p: finite, amplitude: finite, period: finite }))
    .optional(),
  cyclePeriodDoublings: z.array(z.object({ hopf: z.number().int().nullable(), p: finite, period: finite })).optional(),
  cycleTori: z.array(z.object({ hopf: z.number().int().nullable(), p: finite })).optional(),
  window: runningWindow.nullable().optional(),
  sensitivity: z
    .array(
      z.object({
        hopf: z.number().int().nonnegative(),
        symbol: z.string(),
        onset: finite,
        elasticity: finite.nullable(),
        frequency: finite,
        cubic: finite.nullable(),
        flip: z.object({ value: finite, share: finite }).nullable(),
      }),
    )
    .optional(),
  map: z
    .object({
      control: z.string(),
      second: z.string(),
      curves: z.array(
        z.object({
          kind: z.enum(['onset', 'fold', 'cycle-fold']),
          closed: z.boolean(),
          /**
           * Within both ranges; where a curve runs along an edge, up to a thousandth of the range beyond it. Of a closed
           * curve the first point is not repeated. A point that was not judged has no verdict.
           */
          points: z.array(
            z.object({
              p: finite,
              s: finite,
              omega: finite.optional(),
              verdict: z.enum(verdicts).optional(),
              operating: z.boolean().optional(),
            }),
          ),
        }),
      ),
      points: z.array(
        z.object({
          kind: z.enum(['changeover', 'zero-hopf', 'double-zero', 'double-hopf', 'cusp']),
          p: finite,
          s: finite,
          /** Of the onset there; absent at cusps and where it is zero. */
          omega: finite.optional(),
          /** At changeovers; null where a resonance leaves it undefined. */
          secondLyapunov: finite.nullable().optional(),
        }),
      ),
    })
    .optional(),
  warnings: z.array(cardWarning),
})

export type StabilityCard = z.infer<typeof stabilityCard>
export type HopfPoint = z.infer<typeof hopfPoint>
export type SteadyState = z.infer<typeof steadyState>
export type Branch = z.infer<typeof branch>
export type RunningWindow = z.infer<typeof runningWindow>
export type Verdict = (typeof verdicts)[number]
export type CardPart = 'steady' | 'hopf' | 'cycles' | 'map'
