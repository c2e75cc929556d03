import type { AddressInfo } from 'node:net'
import { connect, createServer, type Socket } from 'node:net'

/**
 * A line that can be bad: every chunk is delayed by a random time (in order within one direction), and all connections
 * can be cut, or frozen with nothing passing.
 */
export async function startProxy(target: number, random: () => number, slowest = 0) {
  const pairs = new Set<{ near: Socket; far: Socket }>()
  let frozen = false
  let thaw: (() => void)[] = []

  function pass(from: Socket, to: Socket): void {
    let last: Promise<void> = Promise.resolve()
    from.on('data', (chunk) => {
      const delay = slowest > 0 ? random() * slowest : 0
      last = last.then(async () => {
        if (delay > 0) await new Promise((resolve) => setTimeout(resolve, delay))
        if (frozen) await new Promise<void>((resolve) => thaw.push(resolve))
        if (!to.destroyed) to.write(chunk)
      })
    })
    from.on('end', () => {
      last = last.then(() => {
        to.end()
      })
    })
    from.on('error', () => to.destroy())
    from.on('close', () => to.destroy())
  }

  const server = createServer((near) => {
    const far = connect(target, '127.0.0.1')
    const pair = { near, far }
    pairs.add(pair)
    near.setNoDelay(true)
    far.setNoDelay(true)
    near.on('close', () => pairs.delete(pair))
    pass(near, far)
    pass(far, near)
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const release = () => {
    for (const go of thaw) go()
    thaw = []
  }
  return {
    port: (server.address() as AddressInfo).port,
    get connections() {
      return pairs.size
    },
    /** Ends every connection without a word. */
    cut() {
      for (const { near, far } of pairs) {
        near.destroy()
        far.destroy()
      }
    },
    setFrozen(value: boolean) {
      frozen = value
      if (!value) release()
    },
    async close() {
      release()
      this.cut()
      await new Promise<void>((resolve) => server.close(() => resolve()))
    },
  }
}
