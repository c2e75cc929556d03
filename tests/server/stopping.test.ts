import { once } from 'node:events'
import { createServer } from 'node:http'
import { pino } from 'pino'
import { afterEach, describe, expect, test } from 'vitest'
import { createStop, type Stoppable } from '#server/stopping.ts'

const never = () => new Promise<void>(() => undefined)
const servers: ReturnType<typeof createServer>[] = []
afterEach(() => {
  for (const server of servers) server.close().closeAllConnections()
  servers.length = 0
})

async function stoppable(changes: Partial<Stoppable>) {
  const done: string[] = []
  const server = createServer((_request, response) => response.end('x'))
  servers.push(server)
  server.listen(0, '127.0.0.1')
  await once(server, 'listening')
  const note = (what: string) => async () => {
    done.push(what)
  }
  const codes: number[] = []
  const stop = createStop({
    logger: pino({ level: 'silent' }),
    server,
    drain: 200,
    refuseNew: () => done.push('refuse new'),
    closeSockets: note('sockets'),
    release: [note('children'), note('store'), note('database')],
    exit: (code) => codes.push(code),
    ...changes,
  })
  return { stop, done, codes, server }
}

describe('stopping', () => {
  test('goes in order and ends with the code it was given', async () => {
    const { stop, done, codes, server } = await stoppable({})
    await stop(0, 'SIGTERM')
    expect(done).toEqual(['refuse new', 'sockets', 'children', 'store', 'database'])
    expect(codes).toEqual([0])
    expect(server.listening).toBe(false)
  })

  test('an unexpected error ends it the same way, but with 1', async () => {
    const { stop, done, codes } = await stoppable({})
    await stop(1, 'unhandled rejection')
    expect(done.at(-1)).toBe('database')
    expect(codes).toEqual([1])
  })

  test('what fails or hangs keeps nothing else from being released', async () => {
    const released: string[] = []
    const { stop, codes } = await stoppable({
      closeSockets: never,
      release: [
        async () => {
          throw new Error('a child would not end')
        },
        never,
        async () => {
          released.push('database')
        },
      ],
    })
    await stop(0, 'SIGTERM')
    expect(released).toEqual(['database'])
    expect(codes).toEqual([0])
  })

  test('asked a second time, it does not wait', async () => {
    const { stop, codes } = await stoppable({ closeSockets: never, drain: 60_000 })
    void stop(0, 'SIGTERM')
    await stop(0, 'SIGTERM')
    expect(codes).toEqual([1])
  })
})
