import { afterEach, describe, expect, test, vi } from 'vitest'
import { z } from 'zod'
import { type ChildPool, type ChildPoolOptions, createChildPool } from '#server/compute/pool.ts'
import { limits } from '#server/limits.ts'

const script = new URL('./fixtures/hostile-child.ts', import.meta.url)
const open: { close(): Promise<void> }[] = []
afterEach(() => Promise.all(open.splice(0).map((pool) => pool.close())))

function poolOf(options: Partial<ChildPoolOptions> = {}): ChildPool {
  const pool = createChildPool({ script, size: 1, deadline: 10_000, ...options })
  open.push(pool)
  return pool
}

const echoed = z.object({ value: z.unknown(), pid: z.number(), secrets: z.array(z.string()) })
async function echo(pool: ChildPool, value: unknown) {
  const outcome = await pool.run({ act: 'echo', value })
  if (!outcome.ok) throw new Error(`echo: ${outcome.reason}`)
  return echoed.parse(outcome.answer)
}
const isAlive = (pid: number) => {
  try {
    return process.kill(pid, 0)
  } catch {
    return false
  }
}

describe('the pool of child processes', () => {
  test('answers a job from a child that lives on for the next one', async () => {
    const pool = poolOf()
    const first = await echo(pool, { deep: ['μ', 1e-300, null] })
    expect(first.value).toEqual({ deep: ['μ', 1e-300, null] })
    expect((await echo(pool, 2)).pid).toBe(first.pid)
  })

  test('kills a child that never ends at the deadline and answers the next job', async () => {
    const pool = poolOf({ deadline: 500 })
    const { pid } = await echo(pool, 1)
    expect(await pool.run({ act: 'loop' })).toEqual({ ok: false, reason: 'deadline' })
    const next = await echo(pool, 2)
    expect(next.value).toBe(2)
    expect(next.pid).not.toBe(pid)
    expect(isAlive(pid)).toBe(false)
  })

  test('survives a child that runs out of memory', async () => {
    const pool = poolOf({ memory: 64, deadline: 60_000 })
    expect(await pool.run({ act: 'memory' })).toEqual({ ok: false, reason: 'crashed' })
    expect((await echo(pool, 2)).value).toBe(2)
  })

  test('bounds the memory beside the heap as well', async () => {
    const pool = poolOf({ deadline: 60_000 })
    const outcome = await pool.run({ act: 'buffers' })
    // The system refuses the allocation: the child throws or dies, but never gets far beyond 600 MB.
    expect(outcome.ok).toBe(false)
    expect(['failed', 'crashed']).toContain(outcome.ok ? '' : outcome.reason)
    expect((await echo(pool, 2)).value).toBe(2)
  })

  test('survives a child that exits and one that throws; the latter lives on', async () => {
    const pool = poolOf()
    expect(await pool.run({ act: 'exit' })).toEqual({ ok: false, reason: 'crashed' })
    const { pid } = await echo(pool, 1)
    expect(await pool.run({ act: 'throw' })).toEqual({ ok: false, reason: 'failed', message: 'no' })
    expect((await echo(pool, 2)).pid).toBe(pid)
  })

  test('does not hand its own secrets to the children', async () => {
    process.env.TEST_SECRET = 'x'
    process.env.TEST_DATABASE_URL = 'mysql://x'
    const pool = poolOf()
    expect((await echo(pool, 1)).secrets).toEqual([])
  })

  test('replaces a child after its share of jobs', async () => {
    const pool = poolOf({ recycleAfter: 2 })
    const pids = []
    for (let i = 0; i < 4; i++) pids.push((await echo(pool, i)).pid)
    expect(pids[0]).toBe(pids[1])
    expect(pids[2]).toBe(pids[3])
    expect(pids[1]).not.toBe(pids[2])
  })

  test('works on as many jobs at once as it has children, the rest wait their turn', async () => {
    const pool = poolOf({ size: 2 })
    await vi.waitFor(() => expect(pool.state().ready).toHaveLength(2), 30_000)
    const answers = [1, 2, 3, 4, 5].map((value) => pool.run({ act: 'wait', value }))
    expect(pool.state()).toMatchObject({ running: 2, waiting: 3 })
    const values = (await Promise.all(answers)).map((outcome) => outcome.ok && outcome.answer)
    expect(values).toEqual([1, 2, 3, 4, 5].map((value) => ({ value })))
  })

  test('refuses a job where too many wait', async () => {
    const pool = poolOf({ queueLimit: 2 })
    await echo(pool, 0)
    const outcomes = await Promise.all([1, 2, 3, 4].map((value) => pool.run({ act: 'wait', value })))
    expect(outcomes.map((outcome) => (outcome.ok ? 'done' : outcome.reason))).toEqual([
      'done',
      'done',
      'done',
      'queue-full',
    ])
  })

  test('takes an aborted job out of the queue and leaves a running one to its end', async () => {
    const pool = poolOf()
    await echo(pool, 0)
    const running = new AbortController()
    const waiting = new AbortController()
    const first = pool.run({ act: 'wait', value: 1 }, { signal: running.signal })
    const second = pool.run({ act: 'wait', value: 2 }, { signal: waiting.signal })
    running.abort()
    waiting.abort()
    expect(await first).toEqual({ ok: false, reason: 'aborted' })
    expect(await second).toEqual({ ok: false, reason: 'aborted' })
    expect(pool.state()).toMatchObject({ waiting: 0, running: 1 })
    expect((await echo(pool, 3)).value).toBe(3)
  })

  test('puts background jobs behind all others', async () => {
    const pool = poolOf()
    await echo(pool, 0)
    const order: string[] = []
    const run = (name: string, background: boolean) =>
      pool.run({ act: 'wait' }, { background }).then(() => order.push(name))
    await Promise.all([run('first', false), run('quiet', true), run('second', false), run('third', false)])
    expect(order).toEqual(['first', 'second', 'third', 'quiet'])
  })

  test('keeps one child free of background jobs', async () => {
    const pool = poolOf({ size: 2 })
    await vi.waitFor(() => expect(pool.state().ready).toHaveLength(2), 30_000)
    const quiet = [1, 2, 3].map((value) => pool.run({ act: 'wait', value }, { background: true }))
    expect(pool.state()).toMatchObject({ running: 1, waiting: 2 })
    expect((await echo(pool, 'now')).value).toBe('now')
    expect((await Promise.all(quiet)).every((outcome) => outcome.ok)).toBe(true)
  })

  test('answers every job and leaves no child behind when closed', async () => {
    const pool = poolOf()
    const { pid } = await echo(pool, 0)
    const jobs = [pool.run({ act: 'loop' }), pool.run({ act: 'echo' })]
    await pool.close()
    expect(await Promise.all(jobs)).toEqual([
      { ok: false, reason: 'closed' },
      { ok: false, reason: 'closed' },
    ])
    expect(isAlive(pid)).toBe(false)
    expect(await pool.run({ act: 'echo' })).toEqual({ ok: false, reason: 'closed' })
  })

  test('fails its jobs instead of waiting for ever where the children cannot start', async () => {
    const events: string[] = []
    const pool = poolOf({
      script: new URL('./fixtures/no-such-child.ts', import.meta.url),
      log: (event) => events.push(event),
    })
    expect(await pool.run({ act: 'echo' })).toEqual({ ok: false, reason: 'not-started' })
    expect(new Set(events)).toEqual(new Set(['start-failed']))
  })
})

test('a card may take ten seconds, and a minute while the demonstration library is loaded', () => {
  expect(limits.compute.cardDeadline).toBe(10_000)
  expect(limits.loading).toEqual({ ...limits.compute, cardDeadline: 60_000 })
})
