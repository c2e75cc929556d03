import { type ReactNode, useLayoutEffect, useRef, useState } from 'react'
import { cloudPath } from './cloud-path.ts'

/** The scalloped line of a drawing around what changed. The outline follows the size of what stands inside. */
export function RevisionCloud({ children, label }: { children: ReactNode; label?: string }) {
  const frame = useRef<HTMLDivElement>(null)
  const [size, setSize] = useState({ width: 0, height: 0 })

  useLayoutEffect(() => {
    const element = frame.current
    if (!element) return
    const measure = () => setSize({ width: element.offsetWidth, height: element.offsetHeight })
    measure()
    const observer = new ResizeObserver(measure)
    observer.observe(element)
    return () => observer.disconnect()
  }, [])

  const name = label === undefined ? {} : { role: 'group', 'aria-label': label }
  return (
    <div ref={frame} className="relative px-4 py-3" {...name}>
      {size.width > 0 && (
        <svg
          aria-hidden
          className="pointer-events-none absolute inset-0 overflow-visible"
          width={size.width}
          height={size.height}
        >
          <path d={cloudPath(size.width, size.height)} fill="none" stroke="currentColor" strokeWidth="1.5" />
        </svg>
      )}
      {children}
    </div>
  )
}
