import { type RefObject, useLayoutEffect, useRef, useState } from 'react'

/** Width of an element in whole pixels, followed as it changes; `first` until it is known. */
export function useWidth<Element extends HTMLElement>(first: number): [RefObject<Element | null>, number] {
  const ref = useRef<Element>(null)
  const [width, setWidth] = useState(first)
  useLayoutEffect(() => {
    const element = ref.current
    if (!element) return
    const read = () => {
      const now = Math.round(element.clientWidth)
      if (now > 0) setWidth(now)
    }
    read()
    const observer = new ResizeObserver(read)
    observer.observe(element)
    return () => observer.disconnect()
  }, [])
  return [ref, width]
}
