import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest'
import { type DraftContent, draftFromDocument } from '#shared/model/draft.ts'
import { answerAt } from '#src/workers/answer-at.ts'
import { answerDraft } from '#src/workers/answer-draft.ts'
import { type CardPort, createCardRunner } from '#src/workers/card-runner.ts'
import type { WorkerRequest } from '#src/workers/messages.ts'
import { bistable, calm, wheelset } from '#tests/support/models.ts'

/** A port in place of a worker: it keeps what it is asked and answers when the test says so, with the real answers. */
class HeldPort implements CardPort {
  asked: WorkerRequest[] = []
  ended = false
  onmessage: CardPort['onmessage'] = null
  onerror: CardPort['onerror'] = null
  postMessage(request: WorkerRequest) {
    this.asked.push(structuredClone(request))
  }
  terminate() {
    this.ended = true
  }
  /** Answers the oldest request that is not answered yet. */
  answer() {
    const request = this.asked.shift()
    if (!request) throw new Error('nothing was asked')
    const post = (reply: unknown) => this.onmessage?.({ data: structuredClone(reply) })
    if (request.kind === 'draft') answerDraft(request.id, request.draft, post)
    else answerAt(request.id, request.document, request.p, post)
  }
}

function setUp(options: { patience?: number; longest?: number } = {}) {
  const ports: HeldPort[] = []
  const runner = createCardRunner({
    spawn: () => {
      const port = new HeldPort()
      ports.push(port)
      return port
    },
    now: () => new Date('2026-12-01T09:41:00Z'),
    ...options,
  })
  const port = (index: number) => {
    const found = ports[index]
    if (!found) throw new Error(`no port ${index}`)
    return found
  }
  return { runner, ports, port }
}

const draft = (equations: string): DraftContent => ({ ...draftFromDocument(calm), equations })
const lag = (rate: number) => draft(`dx/dt = ${rate}*(p - x)`)

beforeEach(() => {
  vi.useFakeTimers()
})
afterEach(() => {
  vi.useRealTimers()
})

describe('one run at a time', () => {
  test('a draft gives its checked text and then its card', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1), 12)
    expect(runner.getState()).toMatchObject({ computing: true, older: false, card: null })
    port(0).answer()
    const { checked, card, computing, older } = runner.getState()
    expect(computing).toBe(false)
    expect(older).toBe(false)
    expect(checked?.errors).toEqual([])
    expect(card?.editedAt).toBe(12)
    expect(card?.at.toISOString()).toBe('2026-12-01T09:41:00.000Z')
    // x' = p - x at p = 1 rests at x = 1.
    expect(card?.card.steadyStates?.[0]?.state.x).toBeCloseTo(1, 12)
  })

  test('of a burst of edits only the first and the newest are computed', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1))
    for (const rate of [2, 3, 4, 5]) runner.analyse(lag(rate))
    expect(port(0).asked).toHaveLength(1)
    port(0).answer()
    expect(runner.getState()).toMatchObject({ computing: true, older: true })
    const [next] = port(0).asked
    expect(next?.kind === 'draft' && next.draft.equations).toBe('dx/dt = 5*(p - x)')
    port(0).answer()
    // x' = 5 (p - x) has the eigenvalue -5.
    expect(runner.getState().card?.card.steadyStates?.[0]?.eigenvalues).toEqual([{ re: -5, im: 0 }])
    expect(runner.getState()).toMatchObject({ computing: false, older: false })
    expect(port(0).asked).toEqual([])
  })

  test('text that cannot be read keeps the card of before and says what is wrong', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1))
    port(0).answer()
    runner.analyse(draft('dx/dt = (p - x'))
    port(0).answer()
    const { checked, card, older, computing } = runner.getState()
    expect(checked?.errors[0]).toMatchObject({ code: 'syntax', line: 1 })
    expect(card).not.toBeNull()
    expect(older).toBe(true)
    expect(computing).toBe(false)
  })

  test('the card is shown before its sensitivities are there', () => {
    const { runner, port } = setUp()
    const seen: ('first' | 'whole')[] = []
    runner.analyse(draftFromDocument(wheelset(-0.01)))
    runner.subscribe(() => {
      const { card, computing } = runner.getState()
      if (card && !computing) seen.push(card.complete ? 'whole' : 'first')
    })
    port(0).answer()
    expect(seen).toEqual(['first', 'whole'])
    // One onset, and every parameter but the control: V0, Vs, c3, c5, w, tau.
    expect(runner.getState().card?.card.sensitivity).toHaveLength(6)
  })

  test('progress is told only of runs that take long', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1))
    const tell = (share: number) => port(0).onmessage?.({ data: { kind: 'progress', id: 1, stage: 'branches', share } })
    tell(0.1)
    expect(runner.getState().progress).toBeNull()
    vi.advanceTimersByTime(300)
    tell(0.4)
    tell(0.5)
    expect(runner.getState().progress).toEqual({ stage: 'branches', share: 0.4 })
  })

  test('listeners hear of every change until they leave', () => {
    const { runner, port } = setUp()
    const heard = vi.fn()
    const leave = runner.subscribe(heard)
    runner.analyse(lag(1))
    port(0).answer()
    expect(heard.mock.calls.length).toBeGreaterThanOrEqual(3)
    const before = heard.mock.calls.length
    leave()
    runner.analyse(lag(2))
    expect(heard.mock.calls).toHaveLength(before)
  })
})

describe('what the user asks for', () => {
  test('the newest text is run again', () => {
    const { runner, port } = setUp()
    runner.again()
    expect(port(0).asked).toEqual([])
    runner.analyse(lag(1), 5)
    port(0).answer()
    runner.again(9)
    expect(runner.getState()).toMatchObject({ computing: true })
    port(0).answer()
    expect(runner.getState().card?.editedAt).toBe(9)
  })

  test('a run is stopped: its worker ends, the card of before stays and is said to be older, and it can be run again', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1))
    port(0).answer()
    runner.analyse(lag(2))
    runner.analyse(lag(3))
    runner.stop()
    expect(port(0).ended).toBe(true)
    expect(runner.getState()).toMatchObject({ computing: false, older: true, progress: null })
    expect(runner.getState().failure).toMatch(/^Stopped before its end/)
    vi.advanceTimersByTime(60_000)
    expect(port(1).asked).toEqual([])
    runner.again()
    port(1).answer()
    expect(runner.getState()).toMatchObject({ older: false, failure: null })
    // x' = 3 (p - x): the newest text, not the one that was running.
    expect(runner.getState().card?.card.steadyStates?.[0]?.eigenvalues[0]?.re).toBe(-3)
  })

  test('where nothing runs there is nothing to stop', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1))
    port(0).answer()
    runner.stop()
    expect(port(0).ended).toBe(false)
    expect(runner.getState().failure).toBeNull()
  })
})

describe('a run that takes too long', () => {
  test('is given up for a newer text once its time is over: its worker ends, the warm spare takes over', () => {
    const { runner, ports, port } = setUp({ patience: 400 })
    runner.analyse(lag(1))
    expect(ports).toHaveLength(2)
    vi.advanceTimersByTime(300)
    runner.analyse(lag(2))
    vi.advanceTimersByTime(99)
    expect(port(0).ended).toBe(false)
    vi.advanceTimersByTime(2)
    expect(port(0).ended).toBe(true)
    expect(port(1).asked).toHaveLength(1)
    // What the ended worker still had to say is not heard.
    port(0).answer()
    expect(runner.getState().card).toBeNull()
    port(1).answer()
    expect(runner.getState().card?.card.steadyStates?.[0]?.eigenvalues[0]?.re).toBe(-2)
    expect(runner.getState().failure).toBeNull()
  })

  test('is given more time where the last run of the model took long', () => {
    const { runner, port } = setUp({ patience: 400 })
    runner.analyse(lag(1))
    vi.advanceTimersByTime(600)
    port(0).answer()
    runner.analyse(lag(2))
    runner.analyse(lag(3))
    // Two and a half times 600 ms.
    vi.advanceTimersByTime(1499)
    expect(port(0).ended).toBe(false)
    vi.advanceTimersByTime(2)
    expect(port(0).ended).toBe(true)
  })

  test('is left alone while nothing newer waits', () => {
    const { runner, port } = setUp({ patience: 400 })
    runner.analyse(lag(1))
    vi.advanceTimersByTime(10_000)
    expect(port(0).ended).toBe(false)
    port(0).answer()
    expect(runner.getState().card).not.toBeNull()
  })

  test('without an answer for very long it is taken to hang, is replaced, and that is said', () => {
    const { runner, port } = setUp({ longest: 45_000 })
    runner.analyse(lag(1))
    vi.advanceTimersByTime(45_000)
    expect(port(0).ended).toBe(true)
    expect(runner.getState()).toMatchObject({
      computing: false,
      failure: 'The calculation gave no answer and was started anew.',
    })
    runner.analyse(lag(2))
    port(1).answer()
    expect(runner.getState()).toMatchObject({ failure: null, computing: false, older: false })
  })
})

describe('a worker that crashes', () => {
  test('is replaced and said; the next edit is computed by another', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1))
    port(0).onerror?.(new Error('out of memory'))
    expect(port(0).ended).toBe(true)
    expect(runner.getState().failure).toBe('The calculation ended unexpectedly and was started anew.')
    runner.analyse(lag(3))
    port(1).answer()
    expect(runner.getState()).toMatchObject({ failure: null, computing: false })
    expect(runner.getState().card?.card.steadyStates?.[0]?.eigenvalues[0]?.re).toBe(-3)
  })

  test('that waited as the spare is not missed', () => {
    const { runner, port, ports } = setUp()
    runner.analyse(lag(1))
    port(1).onerror?.(new Error('refused'))
    port(0).answer()
    expect(runner.getState().failure).toBeNull()
    runner.analyse(lag(2))
    expect(ports).toHaveLength(3)
  })

  test('what is no message of ours is not heard', () => {
    const { runner, port } = setUp()
    runner.analyse(lag(1))
    port(0).onmessage?.({ data: { kind: 'card', id: 1, card: 'none' } })
    port(0).onmessage?.({ data: 7 })
    expect(runner.getState().card).toBeNull()
    port(0).answer()
    expect(runner.getState().card).not.toBeNull()
  })
})

describe('the running point', () => {
  test('its steady states are computed when nothing else is to do', () => {
    const { runner, port } = setUp()
    runner.analyse(draftFromDocument(bistable))
    runner.refine(0.5)
    port(0).answer()
    port(0).answer()
    // x^3 - x = 0.5 has one real root, 1.1915 (Cardano: the discriminant 4 - 27/4 is negative).
    const { exact } = runner.getState()
    expect(exact?.p).toBe(0.5)
    expect(exact?.complete).toBe(true)
    expect(exact?.steadyStates.map(({ state }) => Math.round((state.x ?? 0) * 1e4) / 1e4)).toEqual([1.1915])
  })

  test('an edit goes first, and what was computed for the model before is forgotten', () => {
    const { runner, port } = setUp()
    runner.analyse(draftFromDocument(bistable))
    port(0).answer()
    runner.refine(0.5)
    port(0).answer()
    expect(runner.getState().exact).not.toBeNull()
    runner.analyse(lag(1))
    port(0).answer()
    expect(runner.getState().exact).toBeNull()
    expect(port(0).asked[0]).toMatchObject({ kind: 'at', p: 0.5 })
  })

  test('is asked for once, not again and again', () => {
    const { runner, port } = setUp()
    runner.analyse(draftFromDocument(bistable))
    port(0).answer()
    runner.refine(0.5)
    port(0).answer()
    runner.refine(0.5)
    expect(port(0).asked).toEqual([])
  })
})

test('closing ends both workers', () => {
  const { runner, port } = setUp()
  runner.analyse(lag(1))
  runner.close()
  expect(port(0).ended).toBe(true)
  expect(port(1).ended).toBe(true)
})
