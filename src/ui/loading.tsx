/** Nothing for half a second, then the mark filling and what is being done. */
import { useEffect, useState } from 'react'

export function Loading({ what }: { what: string }) {
  const [late, setLate] = useState(false)
  useEffect(() => {
    const timer = setTimeout(() => setLate(true), 500)
    return () => clearTimeout(timer)
  }, [])
  return (
    <div role="status" className="flex min-h-40 items-center gap-4 px-(--leaf-gutter) py-8">
      {late ? (
        <>
          <span aria-hidden className="grid grid-cols-3 gap-0.5">
            {Array.from({ length: 9 }, (_, i) => (
              <i
                key={i}
                className={`size-3 ${i > 2 ? 'animate-pulse bg-copper motion-reduce:animate-none' : '[background:var(--hatch)]'}`}
              />
            ))}
          </span>
          {what}
        </>
      ) : null}
    </div>
  )
}
