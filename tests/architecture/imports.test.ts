import { readdirSync, readFileSync } from 'node:fs'
import path from 'node:path'
import { describe, expect, test } from 'vitest'

/**
 * Who may import whom. The first rule whose folder holds the file decides. `own` are folders of this project, `packages`
 * the npm packages (or node: modules) allowed; 'any' means no restriction. Type-only imports count as well.
 */
const rules: { folder: string; own: string[]; packages: string[] | 'any' }[] = [
  { folder: 'shared/numerics', own: ['shared/numerics'], packages: [] },
  { folder: 'shared/model', own: ['shared/model', 'shared/numerics'], packages: ['mathjs/number', 'mathjs', 'zod'] },
  { folder: 'shared/stability', own: ['shared/stability', 'shared/model', 'shared/numerics'], packages: [] },
  { folder: 'shared/api', own: ['shared'], packages: ['zod'] },
  { folder: 'shared/ydoc', own: ['shared'], packages: ['yjs', 'zod'] },
  { folder: 'drizzle', own: ['drizzle', 'shared'], packages: 'any' },
  { folder: 'collab', own: ['collab', 'drizzle', 'shared'], packages: 'any' },
  { folder: 'server/queries', own: ['server/queries', 'drizzle', 'shared'], packages: 'any' },
  {
    folder: 'server/services',
    own: [
      'server/services',
      'server/queries',
      'server/compute',
      'server/http/app-error.ts',
      'server/config.ts',
      'server/limits.ts',
      'collab',
      'drizzle',
      'shared',
    ],
    packages: 'any',
  },
  {
    folder: 'server/routes',
    own: [
      'server/routes',
      'server/services',
      'server/http',
      'server/config.ts',
      'server/limits.ts',
      'drizzle/client.ts',
      'shared',
    ],
    packages: 'any',
  },
  { folder: 'server', own: ['server', 'collab', 'drizzle', 'shared'], packages: 'any' },
  {
    folder: 'src/features',
    own: ['src/api', 'src/workers', 'src/components', 'src/hooks', 'src/lib', 'shared'],
    packages: 'any',
  },
  { folder: 'src/components', own: ['src/components', 'src/hooks', 'src/lib', 'shared'], packages: 'any' },
  { folder: 'src/hooks', own: ['src/hooks', 'src/lib', 'shared'], packages: 'any' },
  { folder: 'src/lib', own: ['src/lib', 'shared'], packages: 'any' },
  { folder: 'src/workers', own: ['src/workers', 'src/lib', 'shared'], packages: 'any' },
  { folder: 'src/api', own: ['src/api', 'src/lib', 'shared'], packages: 'any' },
  { folder: 'src', own: ['src', 'shared'], packages: 'any' },
]

const root = path.resolve(import.meta.dirname, '../..')
const under = (folder: string) =>
  readdirSync(path.join(root, folder), { recursive: true, encoding: 'utf8' }).map(
    (file) => `${folder}/${file.replaceAll('\\', '/')}`,
  )
const files = ['shared', 'drizzle', 'collab', 'server', 'src'].flatMap(under).filter((file) => /\.tsx?$/.test(file))
const importPattern =
  /(?:^|\n)\s*(?:import|export)\s[^'"`;]*?from\s*['"]([^'"]+)['"]|(?:^|\n)\s*import\s*['"]([^'"]+)['"]|\bimport\(\s*['"]([^'"]+)['"]\s*\)/g

function importsOf(source: string): string[] {
  return [...source.matchAll(importPattern)].flatMap((match) => match[1] ?? match[2] ?? match[3] ?? [])
}

const within = (file: string, folder: string) => file === folder || file.startsWith(`${folder}/`)

function faultOf(file: string, specifier: string): string | null {
  const rule = rules.find((candidate) => within(file, candidate.folder))
  if (!rule) return `${file}: no rule for this folder`
  const own = specifier.startsWith('#')
    ? specifier.slice(1)
    : specifier.startsWith('.')
      ? path.posix.join(path.posix.dirname(file), specifier)
      : null
  if (own === null) {
    if (rule.packages === 'any' || rule.packages.includes(specifier)) return null
    return `${file} imports the package ${specifier}`
  }
  const target = own.split('?')[0] ?? own
  // A feature's own files are its own; another feature's never are.
  const feature = /^src\/features\/[^/]+/.exec(file)?.[0]
  if (feature && within(target, feature)) return null
  if (!rule.own.some((folder) => within(target, folder))) return `${file} imports ${target}`
  const folderOf = (name: string) => name.split('/')[0]
  if (folderOf(file) !== folderOf(target) && specifier.startsWith('.')) return `${file}: use #${target} across folders`
  return null
}

describe('import directions', () => {
  test('the pattern reads static, side-effect, type and dynamic imports', () => {
    const source =
      "import a from 'a'\nimport type { B } from './b.ts'\nimport 'c'\nexport * from '#shared/d.ts'\nconst e = import('e')"
    expect(importsOf(source)).toEqual(['a', './b.ts', 'c', '#shared/d.ts', 'e'])
  })

  test('a wrong direction is found', () => {
    expect(faultOf('shared/numerics/x.ts', '#shared/model/y.ts')).not.toBeNull()
    expect(faultOf('shared/numerics/x.ts', 'mathjs')).not.toBeNull()
    expect(faultOf('src/features/editor/x.tsx', '#src/features/reviews/y.tsx')).not.toBeNull()
    expect(faultOf('server/queries/x.ts', '../services/y.ts')).not.toBeNull()
    expect(faultOf('src/pages/x.tsx', '#server/app.ts')).not.toBeNull()
    expect(faultOf('src/features/editor/x.tsx', './y.tsx')).toBeNull()
  })

  test('every import of the project goes in an allowed direction', () => {
    expect(files.length).toBeGreaterThan(10)
    const faults = files.flatMap((file) =>
      importsOf(readFileSync(path.join(root, file), 'utf8')).flatMap((specifier) => faultOf(file, specifier) ?? []),
    )
    expect(faults).toEqual([])
  })

  test('services and queries know no express', () => {
    const faults = files
      .filter((file) => within(file, 'server/services') || within(file, 'server/queries'))
      .filter((file) => importsOf(readFileSync(path.join(root, file), 'utf8')).some((s) => s.startsWith('express')))
    expect(faults).toEqual([])
  })

  test('one copy of yjs is installed', () => {
    // Two copies break its constructor checks without a word.
    const copies = under('node_modules').filter(
      (file) => file.endsWith('/node_modules/yjs/package.json') || file === 'node_modules/yjs/package.json',
    )
    expect(copies).toHaveLength(1)
  })
})
