import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { createServer } from 'node:net'
import path from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { z } from 'zod'

const root = path.resolve(import.meta.dirname, '../..')

export interface Script {
  child: ChildProcess
  /** Everything it said so far. */
  output: () => string
  /** Resolves once it said something like this; fails where it ended before, or took more than two minutes. */
  says: (pattern: RegExp) => Promise<void>
  /** Its exit code; null where a signal ended it. */
  ended: Promise<number | null>
}

/** Starts a command-line script of the project without a terminal. An environment variable given as undefined is not there. */
export function startScript(
  script: string,
  args: string[] = [],
  environment: Record<string, string | undefined> = {},
  options: { channel?: boolean } = {},
): Script {
  const loader = script.endsWith('.ts') ? ['--import', 'tsx'] : []
  const child = spawn(process.execPath, [...loader, script, ...args], {
    cwd: root,
    env: { PATH: process.env.PATH, HOME: process.env.HOME, ...environment },
    // The channel tells a long-running script when this run is killed.
    stdio: ['ignore', 'pipe', 'pipe', ...(options.channel ? ['ipc' as const] : [])],
  })
  let said = ''
  for (const stream of [child.stdout, child.stderr]) {
    stream?.setEncoding('utf8').on('data', (chunk: string) => {
      said += chunk
    })
  }
  const ended = once(child, 'close').then(([code]) => z.number().nullable().parse(code))
  const says = async (pattern: RegExp) => {
    for (let tries = 0; tries < 1200; tries++) {
      if (pattern.test(said)) return
      if (child.exitCode !== null || child.signalCode !== null) break
      await sleep(100)
    }
    if (!pattern.test(said)) throw new Error(`${script} did not say ${pattern}:\n${said}`)
  }
  return { child, output: () => said, says, ended }
}

/** Runs a script to its end. */
export async function runScript(
  ...given: Parameters<typeof startScript>
): Promise<{ code: number | null; output: string }> {
  const script = startScript(...given)
  return { code: await script.ended, output: script.output() }
}

/** Stops the database of a data directory when this run ends, however it ends; returns what ends the watch. */
export function watchDatabase(data: string): () => void {
  const program = `
    process.stdin.on('data', () => process.exit())
    process.stdin.on('end', () => {
      const { readFileSync, rmSync } = require('node:fs')
      const pid = Number(readFileSync(${JSON.stringify(path.join(data, 'mariadbd.pid'))}, 'utf8'))
      const alive = () => { try { process.kill(pid, 0); return true } catch { return false } }
      if (alive()) process.kill(pid, 'SIGTERM')
      const timer = setInterval(() => {
        if (alive()) return
        clearInterval(timer)
        rmSync(${JSON.stringify(data)}, { recursive: true, force: true })
      }, 100)
    })`
  const watcher = spawn(process.execPath, ['-e', program], { detached: true, stdio: ['pipe', 'ignore', 'ignore'] })
  watcher.unref()
  return () => void watcher.stdin.end('done')
}

const portOf = z.object({ port: z.number() })

/** A server that holds a port of this machine until closed. */
export async function holdPort() {
  const server = createServer().listen(0, '127.0.0.1')
  await once(server, 'listening')
  const { port } = portOf.parse(server.address())
  return {
    port,
    close: async () => {
      server.close()
      await once(server, 'close')
    },
  }
}

/** A port that was free a moment ago. */
export async function freePort(): Promise<number> {
  const { port, close } = await holdPort()
  await close()
  return port
}
