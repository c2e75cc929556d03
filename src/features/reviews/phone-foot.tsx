import { MessageSquare } from 'lucide-react'
import { Button } from '#src/components/button.tsx'
import { usePhone } from '#src/hooks/use-media.ts'

/** At the foot of a review on a phone: what can be done here, and what needs a wider screen. */
export function PhoneFoot({ mayRemark, onRemark }: { mayRemark: boolean; onRemark: () => void }) {
  if (!usePhone()) return null
  return (
    <div className="sticky bottom-0 z-10 -mx-4 -mb-4 grid justify-items-start gap-2 border-t-[1.5px] border-ink bg-sheet px-4 py-3">
      <p className="text-note text-ink-2">
        {mayRemark && 'You can remark here. '}Approving needs the equations in full, on a wider screen.
      </p>
      {mayRemark && (
        <Button look="first" icon={<MessageSquare aria-hidden className="size-4" />} onClick={onRemark}>
          Write a remark
        </Button>
      )}
    </div>
  )
}
