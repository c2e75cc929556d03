import type { CollabLimits } from './limits.ts'
import type { AppendRefusal, AppendResult, UpdateRow } from './persistence.ts'

/** One message with edits on its way into the database. */
export interface SaveEntry {
  /** What it changed; null where it changed nothing and only its turn is waited for. */
  row: UpdateRow | null
  /** When it came, milliseconds since 1970. */
  at: number
  /** Called once everything up to and with this entry is committed. */
  saved(): void
}

/** What the queue needs of its room. */
export interface SaveTarget {
  append(rows: readonly UpdateRow[]): Promise<AppendResult>
  /** Runs work of this room after all work before it. */
  inTurn<T>(work: () => Promise<T>): Promise<T>
  /** A batch is committed. */
  saved(rows: number, bytes: number): void
  /** The database does not answer (true), or answers again (false). Nothing is dropped meanwhile. */
  notSaving(failing: boolean): void
  /** The draft is not ours to write any more; what is queued will never be committed here. */
  refused(reason: AppendRefusal): void
  report(error: unknown): void
}

/**
 * Writes a room's edits in batches, in order, and says when they are committed. An entry leaves the queue only by being
 * committed or because the whole queue was refused.
 */
export class SaveQueue {
  private readonly limits: CollabLimits['append']
  private readonly target: SaveTarget
  private entries: SaveEntry[] = []
  private running: Promise<void> | null = null
  private hurry: (() => void) | null = null
  private gathering = false
  private stopped = false
  private failing = false

  constructor(target: SaveTarget, limits: CollabLimits['append']) {
    this.target = target
    this.limits = limits
  }

  get size(): number {
    return this.entries.length
  }

  /** When the oldest entry that is not committed came; null where there is none. */
  get unsavedSince(): number | null {
    return this.entries[0]?.at ?? null
  }

  push(entry: SaveEntry): void {
    if (this.stopped) return
    if (entry.row === null && this.entries.length === 0) {
      entry.saved()
      return
    }
    this.entries.push(entry)
    if (this.gathering && this.entries.length >= this.limits.rows) this.hurry?.()
    this.running ??= this.run().finally(() => {
      this.running = null
    })
  }

  /** Writes what is queued without waiting for more; resolves when nothing is left or nothing more can be written. */
  async flush(): Promise<void> {
    this.hurry?.()
    await this.running
  }

  /** Writes nothing more. */
  stop(): void {
    this.stopped = true
    this.hurry?.()
  }

  private async run(): Promise<void> {
    this.gathering = true
    await this.pause(this.limits.wait)
    this.gathering = false
    while (this.entries.length > 0 && !this.stopped) {
      const batch = this.nextBatch()
      const rows = batch.flatMap(({ row }) => row ?? [])
      const result = rows.length === 0 ? { ok: true as const } : await this.commit(rows)
      if (!result) return
      if (!result.ok) {
        this.stop()
        this.target.refused(result.reason)
        return
      }
      this.entries = this.entries.slice(batch.length)
      for (const entry of batch) entry.saved()
      const bytes = rows.reduce((sum, row) => sum + row.data.byteLength, 0)
      if (rows.length > 0) this.target.saved(rows.length, bytes)
    }
  }

  private nextBatch(): SaveEntry[] {
    let bytes = 0
    let count = 0
    for (const { row } of this.entries) {
      bytes += row?.data.byteLength ?? 0
      if (count > 0 && (count >= this.limits.rows || bytes > this.limits.bytes)) break
      count++
    }
    return this.entries.slice(0, count)
  }

  /** Tries until the rows are committed or refused; null where the queue was stopped meanwhile. */
  private async commit(rows: readonly UpdateRow[]): Promise<AppendResult | null> {
    for (let tries = 0; !this.stopped; tries++) {
      // A database that hangs is not asked a second time: the first answer is waited for, but everybody is told.
      const slow = setTimeout(() => this.setFailing(true), this.limits.slow)
      try {
        const result = await this.target.inTurn(() => this.target.append(rows))
        this.setFailing(false)
        return result
      } catch (error) {
        this.target.report(error)
        if (tries >= this.limits.retries.length) this.setFailing(true)
      } finally {
        clearTimeout(slow)
      }
      if (!this.stopped) await this.pause(this.limits.retries[tries] ?? this.limits.retryEvery)
    }
    return null
  }

  private setFailing(failing: boolean): void {
    if (this.failing === failing) return
    this.failing = failing
    this.target.notSaving(failing)
  }

  private async pause(time: number): Promise<void> {
    await new Promise<void>((resolve) => {
      const timer = setTimeout(resolve, time)
      this.hurry = () => {
        clearTimeout(timer)
        resolve()
      }
    })
    this.hurry = null
  }
}
