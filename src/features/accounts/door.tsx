/** The frame of every page before the sign-in: the picture of what the product does, and a form. */
import type { ReactNode } from 'react'
import { Mark } from '../bench/brand.tsx'

/** Tones of a table that goes from "as it came" to "as learned"; drawn, not data. */
const tones = Array.from({ length: 14 * 14 }, (_, i) => {
  const col = i % 14
  const row = Math.floor(i / 14)
  const rough = Math.max(0, 9 - col - Math.floor(((row * 7 + col * 3) % 5) / 2))
  const wobble = ((row * 31 + col * 17 + row * col * 7) % (2 * rough + 1)) - rough
  return Math.min(10, Math.max(1, 6 + Math.round(wobble / 1.6)))
})

export function Door({ title, children }: { title?: string; children: ReactNode }) {
  return (
    <main className="mx-auto grid min-h-dvh max-w-[1180px] items-center gap-12 px-(--leaf-gutter) py-10 laptop:grid-cols-[1fr_auto_22rem]">
      <figure className="hidden laptop:block">
        <div aria-hidden className="grid aspect-square w-full max-w-[36rem] grid-cols-14 gap-[3px]">
          {tones.map((tone, i) => (
            <i
              key={i}
              style={{
                background: i === 13 ? 'transparent' : `var(--color-seq-${tone})`,
                boxShadow: i === 13 ? 'inset 0 0 0 2px var(--color-seq-6)' : 'none',
              }}
            />
          ))}
        </div>
        <figcaption className="mt-3 flex max-w-[36rem] justify-between text-small text-ink-faint">
          <span>as it came</span>
          <span>as learned</span>
        </figcaption>
      </figure>
      <span aria-hidden className="hidden h-[70vh] w-px bg-rule-margin laptop:block" />
      <div className="w-full max-w-[24rem] justify-self-center">
        <p className="flex items-center gap-3.5 text-title font-semibold">
          <Mark size={28} />
          Evenburn
        </p>
        <h1 className="mt-3 mb-6 text-read text-ink-quiet">
          {title ?? 'From drive logs to a fuel table you can trust.'}
        </h1>
        {children}
        <p className="mt-8 border-t border-rule pt-4 text-small text-ink-faint">
          Accounts come by invitation from a workshop. Never operate Evenburn while driving: let a passenger do it, or
          park.
        </p>
      </div>
    </main>
  )
}
