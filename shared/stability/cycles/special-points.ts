import { type CycleAt, locateOn, type Stretch } from './branch-point.ts'
import type { CycleSpace } from './cycle-system.ts'

/**
 * A turning point, period doubling or torus point on a stretch of a branch, or a point at which a multiplier passes 1
 * without a turn (another branch of cycles crosses there).
 */
export interface Special {
  readonly kind: 'fold' | 'period-doubling' | 'torus' | 'crossing'
  readonly at: CycleAt
  /** Share of the stretch at which it lies. */
  readonly s: number
}

/**
 * Turning point: the tangent's control component changes sign. (Multipliers cannot find it: near it the double one
 * splits.) Located until that component is below 1e-7, so the control value is right to its square.
 */
function foldRate({ solution }: CycleAt): number {
  return solution.tangent.p
}

/**
 * Product of (mu + 1), each factor brought to size one: changes sign where a real multiplier passes -1, and is smooth
 * where two real ones become a pair (whose two factors have a positive product).
 */
function doublingTest(at: CycleAt): number {
  return passageTest(at, -1)
}

/** The same for a multiplier that passes 1. */
function crossingTest(at: CycleAt): number {
  return passageTest(at, 1)
}

function passageTest({ solution: { re, im } }: CycleAt, where: 1 | -1): number {
  let product = 1
  for (let i = 0; i < re.length; i++) {
    const x = (re[i] as number) - where
    const y = im[i] as number
    product *= (y === 0 ? x : Math.hypot(x, y)) / (1 + Math.hypot(re[i] as number, y))
  }
  return product
}

/** Product of (mu_i mu_j - 1) over pairs, each factor brought to size one: changes sign where a pair has product 1. */
function torusTest({ solution: { re, im } }: CycleAt): number {
  let productRe = 1
  let productIm = 0
  for (let i = 0; i < re.length; i++) {
    for (let j = i + 1; j < re.length; j++) {
      const a = (re[i] as number) * (re[j] as number) - (im[i] as number) * (im[j] as number)
      const b = (re[i] as number) * (im[j] as number) + (im[i] as number) * (re[j] as number)
      const scale = 1 + Math.hypot(a, b)
      const [x, y] = [(a - 1) / scale, b / scale]
      const next = productRe * x - productIm * y
      productIm = productRe * y + productIm * x
      productRe = next
    }
  }
  return productRe
}

/** Where the trivial multiplier is lost among huge ones (a canard), the others say nothing either. */
const trusted = 0.03

function hasDoubling({ solution: { re, im, trivialError } }: CycleAt): boolean {
  if (trivialError > trusted) return false
  return re.some((x, i) => im[i] === 0 && Math.abs(x + 1) < 1e-4)
}

function hasOne({ solution: { re, im, trivialError } }: CycleAt): boolean {
  return trivialError <= trusted && re.some((x, i) => im[i] === 0 && Math.abs(x - 1) < 1e-4)
}

/** A true pair on the unit circle, not two real multipliers with product 1. */
function hasPairOnCircle({ solution: { re, im, trivialError } }: CycleAt): boolean {
  if (trivialError > trusted) return false
  return re.some((x, i) => (im[i] as number) > 1e-6 && Math.abs(Math.hypot(x, im[i] as number) - 1) < 1e-4)
}

/** The turning point on a stretch, or null. */
export function foldOn(space: CycleSpace, stretch: Stretch): { at: CycleAt; s: number } | null {
  if (!(foldRate(stretch.a) * foldRate(stretch.b) < 0)) return null
  // where the branch is all but vertical the rate itself is small
  const small = Math.min(1e-7, 1e-3 * Math.max(Math.abs(foldRate(stretch.a)), Math.abs(foldRate(stretch.b))))
  return locateOn(space, stretch, foldRate, small)
}

/** All special points on a stretch, in the order of the walk. */
export function specialsOn(space: CycleSpace, stretch: Stretch): Special[] {
  const found: Special[] = []
  const fold = foldOn(space, stretch)
  if (fold) found.push({ kind: 'fold', ...fold })
  if (!fold && crossingTest(stretch.a) * crossingTest(stretch.b) < 0) {
    const crossing = locateOn(space, stretch, crossingTest, 1e-11)
    if (crossing && hasOne(crossing.at)) found.push({ kind: 'crossing', ...crossing })
  }
  if (doublingTest(stretch.a) * doublingTest(stretch.b) < 0) {
    const doubling = locateOn(space, stretch, doublingTest, 1e-11)
    if (doubling && hasDoubling(doubling.at)) found.push({ kind: 'period-doubling', ...doubling })
  }
  if (space.n > 2 && torusTest(stretch.a) * torusTest(stretch.b) < 0) {
    const torus = locateOn(space, stretch, torusTest, 1e-11)
    if (torus && hasPairOnCircle(torus.at)) found.push({ kind: 'torus', ...torus })
  }
  return found.sort((a, b) => a.s - b.s)
}
