import { spawnSync } from 'node:child_process'
import { readdirSync, readFileSync, writeFileSync } from 'node:fs'
import { guarded } from './guarded.ts'

// npm run db:generate -- --name what_changes: drizzle-kit writes the next migration from the schema; this puts its guards in.
const { status } = spawnSync('npx', ['drizzle-kit', 'generate', ...process.argv.slice(2)], { stdio: 'inherit' })
if (status !== 0) process.exit(status ?? 1)
const folder = new URL('./migrations/', import.meta.url)
for (const name of readdirSync(folder).filter((file) => file.endsWith('.sql'))) {
  const file = new URL(name, folder)
  const written = readFileSync(file, 'utf8')
  const safe = guarded(written)
  if (safe !== written) writeFileSync(file, safe)
}
