import { expect, test } from 'vitest'
import { dismissKept, editsAsText, keepEdits, keptEdits } from '#src/features/editor/kept-edits.ts'

const edits = (line: string) => ({
  lines: [line],
  cells: [
    { table: 'parameters' as const, row: 'mu', cell: 'value', value: '0.2' },
    { table: 'settings' as const, row: '', cell: 'title', value: 'Rig' },
  ],
})

test('lines are kept as they are, cells as comments that may stand in the block', () => {
  expect(editsAsText(edits('dx/dt = mu*x'))).toBe('dx/dt = mu*x\n# parameters mu value: 0.2\n# settings title: Rig')
})

test('what was not saved is kept until it is dismissed, for its person and page alone', () => {
  keepEdits(1, 7, { lines: [], cells: [] })
  expect(keptEdits(1, 7)).toBeNull()
  keepEdits(1, 7, { lines: ['first'], cells: [] })
  // Left once more without saving: nothing of before is lost.
  keepEdits(1, 7, { lines: ['second'], cells: [] })
  expect(keptEdits(1, 7)).toBe('first\nsecond')
  expect([keptEdits(2, 7), keptEdits(1, 8)]).toEqual([null, null])
  dismissKept(1, 7)
  expect(keptEdits(1, 7)).toBeNull()
})
