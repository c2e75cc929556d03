/**
 * A bucket of tokens that fills steadily: `burst` at most, `perSecond` new ones. It may go into debt, so that one large
 * thing passes and then has to be waited for.
 */
export class TokenBucket {
  private tokens: number
  private at: number
  private readonly perSecond: number
  private readonly burst: number

  constructor({ perSecond, burst }: { perSecond: number; burst: number }, now: number) {
    this.perSecond = perSecond
    this.burst = burst
    this.tokens = burst
    this.at = now
  }

  /** @returns milliseconds until something may be taken; 0 where it may be at once. */
  wait(now: number): number {
    this.fill(now)
    return this.tokens > 0 ? 0 : ((1 - this.tokens) / this.perSecond) * 1000
  }

  take(amount: number, now: number): void {
    this.fill(now)
    this.tokens -= amount
  }

  private fill(now: number): void {
    const passed = Math.max(0, now - this.at)
    this.at = now
    this.tokens = Math.min(this.burst, this.tokens + (passed / 1000) * this.perSecond)
  }
}
