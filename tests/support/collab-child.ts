import { type ChildProcess, fork } from 'node:child_process'
import { fileURLToPath } from 'node:url'
import { z } from 'zod'

const entry = fileURLToPath(new URL('./collab-process.ts', import.meta.url))

/** A co-editing server in a process of its own, loaded but not listening yet. */
export async function forkCollab(settings: { databaseUrl: string; people: number[]; roomy?: boolean }) {
  const child = fork(entry, [JSON.stringify({ roomy: false, ...settings })], {
    execArgv: ['--import', 'tsx', '--expose-gc'],
    stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
  })
  const exited = new Promise<{ code: number | null; signal: string | null }>((resolve) => {
    child.once('exit', (code, signal) => resolve({ code, signal }))
  })
  await answer(child, exited, z.object({ ready: z.literal(true) }))
  return {
    exited,
    /** Listens; port 0 takes any. */
    async listen(port: number): Promise<number> {
      child.send({ order: 'listen', port })
      return (await answer(child, exited, z.object({ port: z.number() }))).port
    },
    /** Resident memory in bytes after a garbage collection, and the errors logged so far. */
    async memory() {
      child.send({ order: 'memory' })
      return answer(child, exited, z.object({ rss: z.number(), errors: z.array(z.string()) }))
    },
    async kill(signal: 'SIGKILL' | 'SIGTERM') {
      child.kill(signal)
      return exited
    },
  }
}
export type CollabChild = Awaited<ReturnType<typeof forkCollab>>

function answer<T>(child: ChildProcess, exited: Promise<unknown>, shape: z.ZodType<T>): Promise<T> {
  return new Promise((resolve, reject) => {
    child.once('message', (message) => resolve(shape.parse(message)))
    void exited.then(() => reject(new Error('The server process ended.')))
  })
}
