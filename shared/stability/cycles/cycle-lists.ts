import type { HopfPoint, StabilityCard } from '#shared/model/card-document.ts'
import { type Frame, observedAt, snapped } from '../frame.ts'
import type { ListedHopf } from '../window.ts'
import type { CycleAt } from './branch-point.ts'
import { type CycleBranch, isPoint } from './cycle-branches.ts'
import type { CycleEnd, WalkedPoint } from './walk-cycles.ts'

type CardCycle = NonNullable<StabilityCard['cycles']>[number]
type CardPoint = CardCycle['points'][number]

/** The four lists of the card, from the branches. */
export function listCycles(
  frame: Frame,
  branches: readonly CycleBranch[],
  hopf: readonly ListedHopf[],
): Required<Pick<StabilityCard, 'cycles' | 'cycleFolds' | 'cyclePeriodDoublings' | 'cycleTori'>> {
  const out = {
    cycles: [] as CardCycle[],
    cycleFolds: [] as NonNullable<StabilityCard['cycleFolds']>,
    cyclePeriodDoublings: [] as NonNullable<StabilityCard['cyclePeriodDoublings']>,
    cycleTori: [] as NonNullable<StabilityCard['cycleTori']>,
  }
  for (const branch of branches) {
    const { points, start, end } = branch
    const onCard = points.map(({ at }) => cyclePoint(frame, at))
    const first = branch.hopf === null ? undefined : hopf[branch.hopf]
    const last = end.onset === undefined ? undefined : hopf[end.onset]
    if (first) onCard.unshift(onsetPoint(frame, first, onCard[0]?.stable ?? false))
    if (last) onCard.push(onsetPoint(frame, last, onCard.at(-1)?.stable ?? false))
    out.cycles.push({
      hopf: branch.hopf,
      end: cardEnd(frame, end),
      ...(start ? { start: cardEnd(frame, start) } : {}),
      points: onCard,
    })
    for (const { at } of turningPoints(frame, points)) {
      const { p, amplitude, period } = cyclePoint(frame, at)
      out.cycleFolds.push({ hopf: branch.hopf, p, amplitude, period })
    }
    for (const { at, mark } of points) {
      const { p, period } = cyclePoint(frame, at)
      if (mark === 'period-doubling') out.cyclePeriodDoublings.push({ hopf: branch.hopf, p, period })
      if (mark === 'torus') out.cycleTori.push({ hopf: branch.hopf, p })
    }
  }
  return out
}

/** Share of the range by which a branch must come and go for a turn to be one. */
const visible = 1e-7

/**
 * The turning points of a branch. Where it stands vertical to rounding (a canard, a centre), the sign of the tangent's
 * control component changes at random: a group of turns at one control value counts once, and only where the branch comes
 * from and goes to the same side. Turns of cycles as small as the first one belong to the onset.
 */
export function turningPoints(frame: Frame, points: readonly WalkedPoint[]): WalkedPoint[] {
  const out: WalkedPoint[] = []
  const controlAt = (i: number): number => (points[i] as WalkedPoint).at.solution.cycle.p
  for (let i = 0; i < points.length; i++) {
    const { at, mark } = points[i] as WalkedPoint
    if (mark !== 'fold' || isPoint(at, frame.n)) continue
    const here = controlAt(i)
    let before = i - 1
    while (before >= 0 && Math.abs(controlAt(before) - here) < visible) before--
    let after = i + 1
    while (after < points.length && Math.abs(controlAt(after) - here) < visible) after++
    if (before < 0 || after >= points.length) continue
    const sense = Math.sign(here - controlAt(before))
    // of several turns that are one, the furthest in the direction in which the branch arrives
    const group = points.slice(before + 1, after).filter((each) => each.mark === 'fold')
    const furthest = group.reduce((best, each) =>
      sense * (each.at.solution.cycle.p - best.at.solution.cycle.p) > 0 ? each : best,
    )
    if (sense * (here - controlAt(after)) > 0 && !out.includes(furthest)) out.push(furthest)
  }
  return out
}

function cyclePoint(frame: Frame, { solution, measures, stable }: CycleAt): CardPoint {
  const { min, max, amplitude } = measures
  const multipliers = Array.from(solution.re, (re, i) => ({ re: re + 0, im: (solution.im[i] as number) + 0 }))
  return {
    p: controlOnCard(frame, solution.cycle.p),
    period: solution.cycle.period,
    amplitude,
    min,
    max,
    stable,
    multipliers,
  }
}

function controlOnCard(frame: Frame, p: number): number {
  return snapped(frame, p * (frame.unit[frame.n] as number))
}

function cardEnd(frame: Frame, { kind, p }: CycleEnd): CardCycle['end'] {
  return { kind, p: controlOnCard(frame, p) }
}

/** The cycle of size zero at an onset: one multiplier beside the trivial one is 1, the others are exp(lambda T). */
function onsetPoint(frame: Frame, { card, point }: ListedHopf, stable: boolean): CardPoint {
  const value = observedAt(frame, point.sample.z)
  return {
    p: card.p,
    period: card.period,
    amplitude: 0,
    min: value,
    max: value,
    stable,
    multipliers: atOnset(card, point),
  }
}

function atOnset(
  { period }: HopfPoint,
  { sample: { spectrum }, omega }: ListedHopf['point'],
): CardPoint['multipliers'] {
  let critical = -1
  let off = Number.POSITIVE_INFINITY
  for (let i = 0; i < spectrum.n; i++) {
    const distance = Math.hypot(spectrum.re[i] as number, (spectrum.im[i] as number) - omega)
    if (distance < off) {
      off = distance
      critical = i
    }
  }
  const multipliers = [{ re: 1, im: 0 }]
  for (let i = 0; i < spectrum.n; i++) {
    // the pair stands together, positive imaginary part first
    if (i === critical || i === critical + 1) continue
    const size = Math.exp(Math.min(30, (spectrum.re[i] as number) * period))
    const angle = (spectrum.im[i] as number) * period
    multipliers.push({ re: size * Math.cos(angle) + 0, im: spectrum.im[i] === 0 ? 0 : size * Math.sin(angle) })
  }
  return multipliers
}
