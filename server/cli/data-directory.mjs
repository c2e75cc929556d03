// Where a clone keeps its data, and folders that the database's user can enter. Plain Node without packages.
import { spawnSync } from 'node:child_process'
import { createHash } from 'node:crypto'
import { chmodSync, chownSync, existsSync, lstatSync, mkdirSync, statSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { cloneRoot, isRoot } from './programs.mjs'

/** The folder on the way to `folder` that other users may not enter; null where they can get there. */
function closedFolder(folder) {
  for (let current = path.resolve(folder); ; current = path.dirname(current)) {
    if (existsSync(current) && (statSync(current).mode & 0o001) === 0) return current
    if (current === path.dirname(current)) return null
  }
}

/**
 * Where this clone keeps its data: BRINKBOOK_DATA, else `.data` in the clone, else (root, and the database's user cannot
 * enter the clone) a folder below /var/lib/brinkbook named by the clone's path.
 */
export function dataDirectory(given = process.env.BRINKBOOK_DATA) {
  if (given) return path.resolve(process.env.INIT_CWD ?? process.cwd(), given)
  if (!isRoot || closedFolder(cloneRoot) === null) return path.join(cloneRoot, '.data')
  return path.join('/var/lib/brinkbook', createHash('sha256').update(cloneRoot).digest('hex').slice(0, 16))
}

/** User and group that the database runs as where root starts it; null: as who starts it. */
export function databaseOwner() {
  if (!isRoot) return null
  const read = (flag) => Number(spawnSync('id', [flag, 'mysql'], { encoding: 'utf8' }).stdout.trim())
  return { uid: read('-u'), gid: read('-g') }
}

/** Makes the data directory. Folders made here may be entered by everybody; the mode of those that stood is never changed. */
export function makeDataDirectory(directory) {
  let first
  try {
    first = mkdirSync(directory, { recursive: true })
  } catch (error) {
    throw new Error(`The data directory ${directory} (BRINKBOOK_DATA) cannot be made: ${error.message}`)
  }
  if (!isRoot) return
  if (first !== undefined) {
    for (let made = path.resolve(directory); made !== path.dirname(path.resolve(first)); made = path.dirname(made)) {
      chmodSync(made, 0o755)
    }
  }
  const closed = closedFolder(directory)
  if (closed === null) return
  throw new Error(
    `The database runs as user mysql, which cannot enter ${closed}. Set BRINKBOOK_DATA to a folder that everybody may enter.`,
  )
}

/**
 * A short folder for sockets, named by the data directory: a socket's path is limited to about 100 bytes. The temporary
 * folder belongs to everybody, so a folder of that name that somebody else made is refused.
 */
export function makeSocketFolder(directory, owner) {
  const key = createHash('sha256').update(path.resolve(directory)).digest('hex').slice(0, 12)
  const folder = path.join(os.tmpdir().length < 40 ? os.tmpdir() : '/tmp', `brinkbook-${key}`)
  mkdirSync(folder, { recursive: true })
  const { uid } = lstatSync(folder)
  if (!lstatSync(folder).isDirectory() || ![process.getuid?.(), owner?.uid].includes(uid)) {
    throw new Error(`${folder} belongs to somebody else. Remove it, or set TMPDIR to a folder of your own.`)
  }
  if (owner) chownSync(folder, owner.uid, owner.gid)
  chmodSync(folder, 0o755)
  return folder
}
