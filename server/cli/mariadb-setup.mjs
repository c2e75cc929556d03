// What a private MariaDB needs before its first query: its files, its passwords, its schema and users. Plain Node.
import { spawnSync } from 'node:child_process'
import { randomBytes } from 'node:crypto'
import { chownSync, existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { findProgram, run } from './programs.mjs'

/** A file's text, or null where there is none. */
export const readText = (file) => (existsSync(file) ? readFileSync(file, 'utf8') : null)

/** One SQL text through the socket, as the operating system's user. */
export function sql(socket, text) {
  const user = `--user=${os.userInfo().username}`
  const args = ['--no-defaults', `--socket=${socket}`, user, '--batch', '--skip-column-names']
  const result = spawnSync(findProgram('mariadb'), args, { input: text, encoding: 'utf8' })
  return { ok: result.status === 0, error: result.stderr }
}

/** The passwords of the two database users, made once and kept beside the data. Each start sets them anew, so a damaged file is no loss. */
export function readCredentials(directory) {
  const file = path.join(directory, 'credentials.json')
  try {
    const { app, migrate } = JSON.parse(readText(file) ?? '')
    if (/^[\w-]{32}$/.test(app) && /^[\w-]{32}$/.test(migrate)) return { app, migrate }
  } catch {}
  const made = { app: randomBytes(24).toString('base64url'), migrate: randomBytes(24).toString('base64url') }
  writeFileSync(`${file}.new`, JSON.stringify(made), { mode: 0o600 })
  renameSync(`${file}.new`, file)
  return made
}

/** Makes an empty database server's files, under another name until they are complete. */
export async function install(data, owner) {
  const half = `${data}.new`
  rmSync(half, { recursive: true, force: true })
  mkdirSync(half)
  if (owner) chownSync(half, owner.uid, owner.gid)
  const args = [
    '--no-defaults',
    ...(owner ? ['--user=mysql'] : []),
    `--datadir=${half}`,
    '--auth-root-authentication-method=socket',
    `--auth-root-socket-user=${os.userInfo().username}`,
    '--skip-test-db',
  ]
  await run(findProgram('mariadb-install-db'), args, { quiet: true })
  renameSync(half, data)
}

/** The schema and its two users; passwords are set anew. */
export function setUpUsers(socket, credentials, throwaway) {
  const made = sql(
    socket,
    `CREATE DATABASE IF NOT EXISTS brinkbook CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
     CREATE OR REPLACE USER 'brinkbook'@'127.0.0.1' IDENTIFIED BY '${credentials.app}';
     GRANT SELECT, INSERT, UPDATE, DELETE ON brinkbook.* TO 'brinkbook'@'127.0.0.1';
     CREATE OR REPLACE USER 'brinkbook_migrate'@'127.0.0.1' IDENTIFIED BY '${credentials.migrate}';
     GRANT ALL ON brinkbook.* TO 'brinkbook_migrate'@'127.0.0.1';
     ${throwaway ? "GRANT ALL ON *.* TO 'brinkbook_migrate'@'127.0.0.1' WITH GRANT OPTION;" : ''}`,
  )
  if (!made.ok) throw new Error(`The database refused its set-up: ${made.error}`)
}
