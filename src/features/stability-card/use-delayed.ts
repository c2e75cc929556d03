import { useEffect, useState } from 'react'

/** True once `on` has been so for `ms` milliseconds: what passes sooner is not worth a change of the picture. */
export function useDelayed(on: boolean, ms: number): boolean {
  const [late, setLate] = useState(false)
  useEffect(() => {
    if (!on) {
      setLate(false)
      return
    }
    const timer = setTimeout(() => setLate(true), ms)
    return () => clearTimeout(timer)
  }, [on, ms])
  return on && late
}
