import { randomInt } from 'node:crypto'

/** Numbers in [0, 1) that follow from the seed (mulberry32, public domain, from memory). */
export function randomFrom(seed: number): () => number {
  let state = seed >>> 0
  return () => {
    state = (state + 0x6d2b79f5) >>> 0
    let mixed = Math.imul(state ^ (state >>> 15), 1 | state)
    mixed = (mixed + Math.imul(mixed ^ (mixed >>> 7), 61 | mixed)) ^ mixed
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 2 ** 32
  }
}

/** The seed of a run: from the environment variable SEED, or a new one. Print it, so that a failure can be repeated. */
export const newSeed = (): number => Number(process.env.SEED ?? randomInt(2 ** 31))

export const pickFrom = <T>(random: () => number, list: readonly T[]): T => {
  const picked = list[Math.floor(random() * list.length)]
  if (picked === undefined) throw new Error('nothing to pick from')
  return picked
}
