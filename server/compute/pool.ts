import { type ChildProcess, fork } from 'node:child_process'
import { createRequire } from 'node:module'
import { z } from 'zod'

/**
 * A pool of warm child processes for work on what strangers typed. A worker thread will not do: one that overflows its
 * heap ends the whole server. A child has a memory limit, no secrets in its environment, and is killed by its process id
 * at the deadline and replaced; the event loop here never computes.
 *
 * Protocol (JSON over the child's channel, see serve-jobs.ts): the child says { ready: true } once its modules are loaded;
 * then { id, job } goes down and { id, answer } or { id, failed } comes up. One job at a time a child.
 */
export interface ChildPoolOptions {
  /** The program of the children. */
  script: URL
  /** How many are kept. */
  size: number
  /** A job that takes longer is ended, in milliseconds. Loading the child's modules does not count. */
  deadline: number
  /** Jobs that may wait; one more is refused. */
  queueLimit?: number
  /** Heap of a child, in megabytes. */
  memory?: number
  /** A child is replaced after so many jobs. */
  recycleAfter?: number
  /** False: the first child starts with the first job. */
  warm?: boolean
  /** Told of ends that were not asked for. Never gets a job's content. */
  log?: (event: 'deadline' | 'crashed' | 'start-failed', detail: { pid: number | undefined; stderr: string }) => void
}

export type JobFailure = 'deadline' | 'crashed' | 'not-started' | 'failed' | 'queue-full' | 'aborted' | 'closed'
/** `message` of a job that failed: what the child threw, a bug. */
export type JobOutcome = { ok: true; answer: unknown } | { ok: false; reason: JobFailure; message?: string }

export interface ChildPool {
  /**
   * Runs a job (anything JSON can carry). Never rejects. Aborting answers at once; a job that has begun still occupies its
   * child until it is done or its deadline passes. `background` jobs wait behind all others.
   */
  run(job: unknown, options?: { signal?: AbortSignal; background?: boolean }): Promise<JobOutcome>
  /** For readiness and tests: process ids of the children that are ready, jobs waiting and running. */
  state(): { ready: number[]; waiting: number; running: number }
  /** Ends every child and answers every job `closed`. */
  close(): Promise<void>
}

interface Job {
  id: number
  job: unknown
  background: boolean
  settle: (outcome: JobOutcome) => void
}

interface Slot {
  child: ChildProcess
  ready: boolean
  running: Job | null
  done: number
  busy: number
  startedAt: number
  timer: NodeJS.Timeout | undefined
  stderr: string
}

const message = z.union([
  z.strictObject({ ready: z.literal(true) }),
  z.strictObject({ id: z.number(), answer: z.unknown() }),
  z.strictObject({ id: z.number(), failed: z.string() }),
])

/** Loading the modules may take this long on a busy machine, in milliseconds. */
const startDeadline = 60_000
/** A child that has computed for so long in all, in milliseconds, is replaced: its CPU limit is above this. */
const busyLimit = 300_000
const cpuSeconds = 600
const dataKilobytes = 600_000
const typescriptLoader = `file://${createRequire(import.meta.url).resolve('tsx')}`

/** -d bounds all memory of the child, -t ends one whose parent was killed while it computed. Never -v: WebAssembly reserves address space. */
const underLimits = `ulimit -d ${dataKilobytes} 2>/dev/null; ulimit -t ${cpuSeconds} 2>/dev/null; ulimit -c 0 2>/dev/null; exec "$0" "$@"`

function startChild(script: URL, memory: number): ChildProcess {
  const { PATH, HOME, TMPDIR, TZ } = process.env
  return fork(script, {
    execPath: '/bin/sh',
    execArgv: ['-c', underLimits, process.execPath, `--max-old-space-size=${memory}`, '--import', typescriptLoader],
    env: { PATH, HOME, TMPDIR, TZ, NODE_ENV: 'production' },
    stdio: ['ignore', 'ignore', 'pipe', 'ipc'],
  })
}

export function createChildPool(options: ChildPoolOptions): ChildPool {
  const { script, size, deadline, queueLimit = 100, memory = 256, recycleAfter = 500, warm = true, log } = options
  const slots = new Set<Slot>()
  const queue: Job[] = []
  let closed = false
  let lastId = 0
  let failedStarts = 0
  let restart: NodeJS.Timeout | undefined

  function end(slot: Slot) {
    clearTimeout(slot.timer)
    slots.delete(slot)
    slot.child.kill('SIGKILL')
  }

  function finish(slot: Slot, outcome: JobOutcome) {
    clearTimeout(slot.timer)
    const job = slot.running
    slot.running = null
    slot.done += 1
    slot.busy += performance.now() - slot.startedAt
    job?.settle(outcome)
  }

  function hear(slot: Slot, received: unknown) {
    const parsed = message.safeParse(received)
    if (!parsed.success || !slots.has(slot)) return
    if ('ready' in parsed.data) {
      clearTimeout(slot.timer)
      slot.ready = true
      failedStarts = 0
    } else {
      if (slot.running?.id !== parsed.data.id) return
      if ('failed' in parsed.data) finish(slot, { ok: false, reason: 'failed', message: parsed.data.failed })
      else finish(slot, { ok: true, answer: parsed.data.answer })
      if (slot.done >= recycleAfter || slot.busy >= busyLimit) end(slot)
    }
    next()
  }

  function gone(slot: Slot) {
    if (!slots.delete(slot)) return
    clearTimeout(slot.timer)
    log?.(slot.ready ? 'crashed' : 'start-failed', { pid: slot.child.pid, stderr: slot.stderr })
    if (slot.running) finish(slot, { ok: false, reason: 'crashed' })
    if (slot.ready) return next()
    failedStarts += 1
    if (failedStarts >= 3) for (const job of queue.splice(0)) job.settle({ ok: false, reason: 'not-started' })
    clearTimeout(restart)
    restart = setTimeout(next, Math.min(100 * 2 ** failedStarts, 10_000))
    restart.unref()
  }

  function start() {
    const slot: Slot = {
      child: startChild(script, memory),
      ready: false,
      running: null,
      done: 0,
      busy: 0,
      startedAt: 0,
      timer: undefined,
      stderr: '',
    }
    slots.add(slot)
    slot.child.stderr?.setEncoding('utf8').on('data', (text: string) => {
      slot.stderr = (slot.stderr + text).slice(-2000)
    })
    slot.child.on('message', (received) => hear(slot, received))
    slot.child.on('error', () => gone(slot))
    slot.child.on('exit', () => gone(slot))
    slot.timer = setTimeout(() => slot.child.kill('SIGKILL'), startDeadline)
  }

  function give(slot: Slot, job: Job) {
    slot.running = job
    slot.startedAt = performance.now()
    slot.timer = setTimeout(() => {
      log?.('deadline', { pid: slot.child.pid, stderr: '' })
      end(slot)
      finish(slot, { ok: false, reason: 'deadline' })
      next()
    }, deadline)
    slot.child.send({ id: job.id, job: job.job }, (error) => {
      if (error) slot.child.kill('SIGKILL')
    })
  }

  /** Background work never takes the last child: people who wait get one at once. */
  function takeNext(): Job | undefined {
    const inBackground = [...slots].filter((slot) => slot.running?.background).length
    if (queue[0]?.background && size > 1 && inBackground >= size - 1) return undefined
    return queue.shift()
  }

  function next() {
    if (closed) return
    for (const slot of slots) {
      if (!slot.ready || slot.running) continue
      const job = takeNext()
      if (!job) break
      give(slot, job)
    }
    while (slots.size < size && (warm || queue.length > 0 || slots.size > 0)) start()
  }

  if (warm) next()

  return {
    run: (job, { signal, background = false } = {}) =>
      new Promise((resolve) => {
        const settle = (outcome: JobOutcome) => {
          signal?.removeEventListener('abort', abort)
          resolve(outcome)
        }
        lastId += 1
        const entry: Job = { id: lastId, job, background, settle }
        const abort = () => {
          const place = queue.indexOf(entry)
          if (place >= 0) queue.splice(place, 1)
          settle({ ok: false, reason: 'aborted' })
        }
        if (closed) return settle({ ok: false, reason: 'closed' })
        if (signal?.aborted) return settle({ ok: false, reason: 'aborted' })
        if (queue.length >= queueLimit) return settle({ ok: false, reason: 'queue-full' })
        signal?.addEventListener('abort', abort, { once: true })
        const firstBackground = queue.findIndex((waiting) => waiting.background)
        if (background || firstBackground < 0) queue.push(entry)
        else queue.splice(firstBackground, 0, entry)
        next()
      }),
    state: () => ({
      ready: [...slots].flatMap((slot) => (slot.ready && slot.child.pid ? [slot.child.pid] : [])),
      waiting: queue.length,
      running: [...slots].filter((slot) => slot.running).length,
    }),
    close: async () => {
      closed = true
      clearTimeout(restart)
      for (const job of queue.splice(0)) job.settle({ ok: false, reason: 'closed' })
      const ended = [...slots].map((slot) => {
        const over = new Promise<void>((resolve) => {
          if (slot.child.exitCode !== null || slot.child.signalCode !== null) resolve()
          else slot.child.once('exit', () => resolve())
        })
        end(slot)
        slot.running?.settle({ ok: false, reason: 'closed' })
        return over
      })
      await Promise.all(ended)
    },
  }
}
