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

/**
 * The turning points of a branch. Where it stands vertical to rounding (a canard), the sign of the tangent's control
 * component changes at random: such a group within 1e-8 of the range is one turning point, or none if it goes on in the
 * same direction. Turns of cycles as small as the first one belong to the onset.
 */
export function turningPoints(frame: Frame, points: readonly WalkedPoint[]): WalkedPoint[] {
  const folds = points.filter(({ at, mark }) => mark === 'fold' && !isPoint(at, frame.n))
  const out: WalkedPoint[] = []
  for (let i = 0; i < folds.length; ) {
    let j = i + 1
    const here = (folds[i] as WalkedPoint).at.solution.cycle.p
    while (j < folds.length && Math.abs((folds[j] as WalkedPoint).at.solution.cycle.p - here) < 1e-8) j++
    if ((j - i) % 2 === 1) out.push(outermost(points, folds.slice(i, j)))
    i = j
  }
  return out
}

/** Of several turns that are one, the furthest in the direction in which the branch arrives. */
function outermost(points: readonly WalkedPoint[], group: readonly WalkedPoint[]): WalkedPoint {
  const first = group[0] as WalkedPoint
  const here = first.at.solution.cycle.p
  const before = points
    .slice(0, points.indexOf(first))
    .findLast(({ at }) => Math.abs(at.solution.cycle.p - here) > 1e-6)
  const sense = before ? Math.sign(here - before.at.solution.cycle.p) : 0
  return group.reduce((best, each) => (sense * (each.at.solution.cycle.p - best.at.solution.cycle.p) > 0 ? each : best))
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
