// One start at a time on one data directory. Plain Node.
import { existsSync, rmSync } from 'node:fs'
import { connect, createServer } from 'node:net'
import path from 'node:path'

/** What another start of this data directory says of itself, or null. */
function askOther(socket) {
  return new Promise((resolve) => {
    const connection = connect(socket)
    let said = ''
    connection.setEncoding('utf8')
    connection.setTimeout(2000, () => connection.destroy())
    connection.on('data', (chunk) => {
      said += chunk
    })
    connection.once('error', () => resolve(null))
    connection.once('close', () => resolve(said === '' ? null : said))
  })
}

/**
 * Makes this the only start of a data directory: two would stop each other's database. The claim is a socket that answers,
 * so it ends with this process, however that ends.
 *
 * @param folder  the data directory's socket folder
 * @param address where this start will serve
 * @throws {Error} naming the other start's address
 */
export async function claimDataDirectory(folder, address) {
  const socket = path.join(folder, 'start.sock')
  if (existsSync(socket)) {
    const other = await askOther(socket)
    if (other !== null) {
      throw new Error(
        `Brinkbook runs already on these data: ${other}. Stop it first, or choose others with BRINKBOOK_DATA.`,
      )
    }
    rmSync(socket, { force: true })
  }
  const server = createServer((connection) => {
    connection.on('error', () => {})
    connection.end(address)
  })
  await new Promise((resolve, reject) => {
    server.once('error', reject)
    server.listen(socket, resolve)
  })
  server.unref()
}
