import { Dialog } from '#src/components/dialog.tsx'
import { singleKeysOn } from '#src/lib/single-keys.ts'

const lists: { title: string; keys: [string, string][] }[] = [
  {
    title: 'Everywhere',
    keys: [
      ['/', 'find a model'],
      ['?', 'this list'],
      ['0 then 1', 'Library'],
      ['0 then 2', 'Reviews'],
      ['0 then 3', 'Groups'],
    ],
  },
  {
    title: 'On a model page',
    keys: [
      ['1 to 4', 'sections of the page'],
      ['e', 'edit'],
      ['t', 'drawing or table'],
      ['Ctrl+Enter', 'run the analysis again'],
      ['Ctrl+Z', 'take your last edit back'],
      ['Ctrl+Shift+Enter', 'send for review'],
    ],
  },
  {
    title: 'In a review',
    keys: [
      ['n, p', 'to the next change, to the one before'],
      ['m', 'write a remark'],
    ],
  },
  {
    title: 'On the running point',
    keys: [
      ['Left, Right', 'one step; with Shift ten'],
      ['Home, End', 'ends of the range'],
      ['o', 'to the next onset'],
      ['w', 'to the next turning point'],
    ],
  },
]

/** All keys of the product. `?` opens it. */
export function KeysDialog({ open, onClose }: { open: boolean; onClose: () => void }) {
  return (
    <Dialog title="Keys" open={open} onClose={onClose}>
      {!singleKeysOn() && <p className="text-note text-ink-2">Single keys are switched off in Preferences.</p>}
      {lists.map((list) => (
        <section key={list.title} className="grid gap-1">
          <h3 className="font-[680]">{list.title}</h3>
          <dl className="grid grid-cols-[10rem_1fr] gap-y-1">
            {list.keys.map(([key, what]) => (
              <div key={key} className="contents">
                <dt className="figures text-note">{key}</dt>
                <dd>{what}</dd>
              </div>
            ))}
          </dl>
        </section>
      ))}
    </Dialog>
  )
}
