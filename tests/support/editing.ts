import { once } from 'node:events'
import { createServer } from 'node:http'
import { z } from 'zod'
import { attachEditing } from '#server/editing.ts'
import type { TestApp } from './app.ts'
import { changedLimits } from './collab-server.ts'
import { apiRoot, type Tab, tab } from './http.ts'
import { RawSocket } from './raw-socket.ts'
import { password, type TestPerson } from './users.ts'

const listening = z.object({ port: z.number() })

/** The test app with its co-editing sockets, on a port: everything as server/index.ts wires it. */
export async function listen(t: TestApp) {
  const server = createServer(t.app)
  const limits = changedLimits((given) => {
    given.handshake.perSecond = 10_000
    given.sockets.perPerson = 1000
    given.recheck.gather = 10
  })
  const editing = attachEditing(server, t.dependencies, t.built, { limits })
  server.listen(0, '127.0.0.1')
  await once(server, 'listening')
  const { port } = listening.parse(server.address())

  /** Signs in and keeps the cookie for sockets as well. */
  async function signIn(person: TestPerson): Promise<{ agent: Tab; cookie: string }> {
    const agent = tab(t.app)
    const answer = await agent.post(`${apiRoot}/session`).send({ email: person.email, password })
    return { agent, cookie: String(answer.headers['set-cookie']).split(';')[0] ?? '' }
  }
  return {
    port,
    signIn,
    open: (pageId: number, cookie: string | null, origin: string | null = t.config.publicOrigin) =>
      new RawSocket(`ws://127.0.0.1:${port}/collab/${pageId}`, { origin, headers: cookie === null ? {} : { cookie } }),
    close: async () => {
      await editing.closeSockets()
      await editing.close()
      server.closeAllConnections()
      server.close()
      await once(server, 'close')
    },
  }
}
