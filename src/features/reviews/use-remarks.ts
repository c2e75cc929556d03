import { useState } from 'react'
import { keepText, keptText } from '#src/lib/kept-text.ts'
import { type DraftRemark, keptRemarks, noRemarks, readRemarks } from './remarks.ts'

export interface Remarks {
  all: readonly DraftRemark[]
  change: (id: number, part: Partial<DraftRemark>) => void
  add: () => void
  clear: () => void
}

/** The remarks somebody writes on a revision. They are kept in the tab, for that person, until they are sent. */
export function useRemarks(person: number, place: string): Remarks {
  const [all, setAll] = useState(() => readRemarks(keptText(person, place)))
  const put = (next: DraftRemark[]) => {
    setAll(next)
    keepText(person, place, keptRemarks(next))
  }
  return {
    all,
    change: (id, part) => put(all.map((remark) => (remark.id === id ? { ...remark, ...part } : remark))),
    add: () => put([...all, { id: Math.max(...all.map((one) => one.id)) + 1, text: '', target: '' }]),
    clear: () => put(noRemarks),
  }
}
