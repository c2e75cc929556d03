import { ChevronDown } from 'lucide-react'

const orders = { changed: 'last change', code: 'code', title: 'name' } as const
export type SortOrder = keyof typeof orders

const isOrder = (value: string): value is SortOrder => Object.hasOwn(orders, value)

export function SortSelect({ value, onChange }: { value: SortOrder; onChange: (value: SortOrder) => void }) {
  return (
    <label className="relative inline-flex min-h-11 items-center gap-1 text-ink-2 bench:min-h-10">
      Sorted by
      <select
        value={value}
        onChange={(event) => {
          if (isOrder(event.target.value)) onChange(event.target.value)
        }}
        className="min-h-9 appearance-none rounded-control bg-transparent pr-6 pl-1 font-[640] text-ink"
      >
        {Object.entries(orders).map(([order, label]) => (
          <option key={order} value={order} className="bg-sheet text-ink">
            {label}
          </option>
        ))}
      </select>
      <ChevronDown aria-hidden className="pointer-events-none absolute right-0 size-4 text-ink" />
    </label>
  )
}
