import { spawnSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { z } from 'zod'
import { stabilityCard } from '#shared/model/card-document.ts'
import { errorCodes } from '#shared/model/errors.ts'
import { referenceCases } from './read-case.ts'

const root = path.resolve(import.meta.dirname, '../..')
const errors = z.object({
  errors: z
    .array(
      z.object({
        code: z.string(),
        message: z.string().min(1),
        line: z.number().optional(),
        path: z.string().optional(),
      }),
    )
    .min(1),
})
const brusselator = referenceCases().find(({ name }) => name === 'brusselator')?.reference.model

let folder = ''
beforeAll(() => {
  folder = mkdtempSync(path.join(os.tmpdir(), 'card-'))
  writeFileSync(path.join(folder, 'model.json'), JSON.stringify(brusselator))
})
afterAll(() => rmSync(folder, { recursive: true, force: true }))

/** Runs the command as `npm run --silent card -- ...` does: in the project's folder, the user's own in INIT_CWD. */
function card(args: string[], input = '') {
  const env = { ...process.env, INIT_CWD: folder }
  const { status, stdout, stderr } = spawnSync(process.execPath, ['server/cli/card.mjs', ...args], {
    cwd: root,
    env,
    input,
    encoding: 'utf8',
  })
  return { status, stdout, stderr }
}

describe('a good document', () => {
  test('a relative file is meant from where the user stands; the card is the only thing on standard output', () => {
    const { status, stdout } = card(['model.json'])
    expect(status).toBe(0)
    const read = stabilityCard.parse(JSON.parse(stdout))
    // 1 + A² with A = 1.5
    expect(read.hopf?.[0]?.p).toBeCloseTo(3.25, 11)
    // everything but the map by default
    expect(read.warnings).toEqual([])
    expect(read.cycles).toMatchObject([{ hopf: 0, end: { kind: 'range-end', p: 5 } }])
    expect(read.map).toBeUndefined()
  })

  test('standard input, and only the parts asked for', () => {
    const { status, stdout } = card(['-', '--parts', 'steady'], JSON.stringify(brusselator))
    expect(status).toBe(0)
    const read = stabilityCard.parse(JSON.parse(stdout))
    expect(read.steadyStates).toHaveLength(1)
    expect([read.hopf, read.window, read.sensitivity, read.cycles]).toEqual([
      undefined,
      undefined,
      undefined,
      undefined,
    ])
    const onlyHopf = stabilityCard.parse(JSON.parse(card(['-', '--parts', 'hopf'], JSON.stringify(brusselator)).stdout))
    expect(onlyHopf.hopf).toHaveLength(1)
    expect([onlyHopf.steadyStates, onlyHopf.branches]).toEqual([undefined, undefined])
  })
})

describe('a bad document exits 2 with all errors coded and nothing on standard output', () => {
  test.each([
    ['text that is no JSON', 'x', ['not-json']],
    [
      'two faults told at once',
      JSON.stringify({ ...brusselator, equations: 'dx/dt = A - nu*x\ndy/dt = B*x +', observed: 'q' }),
      ['unknown-symbol', 'syntax', 'bad-observed'],
    ],
  ])('%s', (_, input, codes) => {
    const { status, stdout, stderr } = card(['-'], input)
    expect([status, stdout]).toEqual([2, ''])
    const told = errors.parse(JSON.parse(stderr)).errors.map(({ code }) => code)
    for (const code of codes) expect(told).toContain(code)
    for (const code of told) expect(errorCodes).toContain(code)
  })
})

describe('misuse exits 1 with one coded error', () => {
  test.each([
    ['a file that is not there', ['absent.json']],
    ['no file', []],
    ['a part that does not exist', ['model.json', '--parts', 'steady,everything']],
    ['an option that does not exist', ['model.json', '--fast']],
  ])('%s', (_, args) => {
    const { status, stdout, stderr } = card(args)
    expect([status, stdout]).toEqual([1, ''])
    expect(errors.parse(JSON.parse(stderr)).errors).toHaveLength(1)
  })
})
