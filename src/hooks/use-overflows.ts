import { type RefObject, useEffect, useState } from 'react'

/** True while an element holds more than it shows sideways. */
export function useOverflows(element: RefObject<HTMLElement | null>): boolean {
  const [overflows, setOverflows] = useState(false)
  useEffect(() => {
    const box = element.current
    if (!box) return
    const measure = () => setOverflows(box.scrollWidth > box.clientWidth + 1)
    measure()
    const observer = new ResizeObserver(measure)
    observer.observe(box)
    if (box.firstElementChild) observer.observe(box.firstElementChild)
    return () => observer.disconnect()
  }, [element])
  return overflows
}
