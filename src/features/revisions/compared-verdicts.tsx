import type { CardComparison, Judged } from '#shared/stability/compare.ts'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { differenceTexts, verdictRows } from './verdict-rows.ts'

export interface ComparedVerdictsProps {
  before: Judged
  after: Judged
  comparison: CardComparison
  was: string
  now: string
}

/** What the analysis says on both sides: the figures of the verdict, changed ones bold and tinted, then every difference. */
export function ComparedVerdicts({ before, after, comparison, was, now }: ComparedVerdictsProps) {
  const columns = [
    { label: 'Figure', hidden: true },
    `Revision ${was}`,
    { label: `Revision ${now}`, className: 'text-ink font-[640]' },
  ]
  const tint = comparison.kind ? tints[comparison.kind.now] : 'bg-pencil-tint'
  return (
    <>
      <Table caption="The verdicts side by side">
        <TableHead columns={columns} />
        <tbody>
          {verdictRows(before, after).map((row) => {
            const changed = row.was !== row.now
            return (
              <Row key={row.what} {...(changed ? { 'data-change': true, tabIndex: -1 } : {})}>
                <Cell className={changed ? 'font-[640]' : 'text-ink-2'}>{row.what}</Cell>
                <Cell className="figures border-l border-rule text-note text-ink-2">{row.was}</Cell>
                <Cell
                  className={`figures border-l border-rule text-note ${changed ? `${tint} font-[680]` : 'text-ink-2'}`}
                >
                  {row.now}
                </Cell>
              </Row>
            )
          })}
        </tbody>
      </Table>
      <details className="border-t-[1.5px] border-ink px-4 py-2" open={comparison.differences.length <= 6}>
        <summary className="min-h-8 content-center text-note">
          {comparison.differences.length === 0
            ? 'No figure of the cards differs beyond its tolerance'
            : `Every difference of the cards: ${comparison.differences.length}`}
        </summary>
        {comparison.differences.length > 0 && (
          <Table caption="Differences of the stability cards">
            <TableHead columns={columns} />
            <tbody>
              {comparison.differences.map((difference) => {
                const [before, after] = differenceTexts(difference)
                return (
                  <Row key={difference.what}>
                    <Cell className={`text-note ${difference.change === 'major' ? 'font-[640]' : ''}`}>
                      {difference.what}
                    </Cell>
                    <Cell className="figures text-note">{before}</Cell>
                    <Cell
                      className={`figures bg-pencil-tint text-note ${difference.change === 'major' ? 'font-[680]' : ''}`}
                    >
                      {after}
                    </Cell>
                  </Row>
                )
              })}
            </tbody>
          </Table>
        )}
      </details>
    </>
  )
}

const tints = {
  hard: 'bg-hard-tint',
  soft: 'bg-soft-tint',
  undecided: 'bg-open-tint',
  none: 'bg-pencil-tint',
} as const
