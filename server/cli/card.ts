import { readFileSync } from 'node:fs'
import path from 'node:path'
import { parseArgs } from 'node:util'
import type { CardPart } from '#shared/model/card-document.ts'

/**
 * `npm run --silent card -- FILE [--parts steady,hopf,cycles,map]`: a model document in, its stability card out.
 * Exit 0 with the card on standard output; 2 with coded errors on standard error for a bad document; 1 where the file
 * cannot be read, the command is misused, or on an internal error.
 */
const allParts: readonly CardPart[] = ['steady', 'hopf', 'cycles', 'map']

class Misuse extends Error {}

function readArguments(): { file: string; parts: CardPart[] | undefined } {
  let parsed: { values: { parts?: string | undefined }; positionals: string[] }
  try {
    parsed = parseArgs({ options: { parts: { type: 'string' } }, allowPositionals: true })
  } catch (error) {
    throw new Misuse(error instanceof Error ? error.message : String(error))
  }
  const [file, ...more] = parsed.positionals
  if (file === undefined || more.length > 0) {
    throw new Misuse('Name one model document (a file, or - for standard input): npm run --silent card -- FILE')
  }
  return { file, parts: parsed.values.parts === undefined ? undefined : readParts(parsed.values.parts) }
}

function readParts(text: string): CardPart[] {
  const wanted = text.split(',').map((part) => part.trim())
  const parts = allParts.filter((part) => wanted.includes(part))
  const unknown = wanted.find((part) => !allParts.some((known) => known === part))
  if (unknown !== undefined) throw new Misuse(`There is no part "${unknown}"; the parts are ${allParts.join(', ')}.`)
  return parts
}

/** npm runs scripts in the project's folder; a relative file is meant from where the user stands. */
function readInput(file: string): string {
  const place = file === '-' ? 0 : path.resolve(process.env.INIT_CWD ?? process.cwd(), file)
  try {
    return readFileSync(place, 'utf8')
  } catch (error) {
    const reason = error instanceof Error ? error.message : String(error)
    throw new Misuse(`The model document cannot be read: ${reason}`)
  }
}

async function main(): Promise<number> {
  const { file, parts } = readArguments()
  const text = readInput(file)
  // loaded here, so that a fault in loading is told like every other
  const { analyse } = await import('#shared/stability/card.ts')
  const result = analyse(text, parts ? { parts } : {})
  if (!result.ok) {
    process.stderr.write(`${JSON.stringify({ errors: result.errors })}\n`)
    return 2
  }
  process.stdout.write(`${JSON.stringify(result.card, null, 1)}\n`)
  return 0
}

try {
  process.exitCode = await main()
} catch (error) {
  const code = error instanceof Misuse ? 'not-readable' : 'internal'
  const message = error instanceof Error ? error.message : String(error)
  process.stderr.write(`${JSON.stringify({ errors: [{ code, message }] })}\n`)
  process.exitCode = 1
}
