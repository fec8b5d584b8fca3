/** Buttons: solid for the next step (one a page), outlined, or an underlined word; and links that look like them. */
import type { ComponentProps, ReactNode } from 'react'
import { Link } from 'react-router-dom'

type Variant = 'solid' | 'outline' | 'word'

const base =
  'inline-flex min-h-(--control-h) items-center justify-center gap-2 rounded-cut border font-semibold whitespace-nowrap transition-colors duration-(--duration-quick) cursor-pointer disabled:cursor-not-allowed'
const look: Record<Variant, string> = {
  solid:
    'border-copper bg-copper px-4 text-on-ink hover:bg-copper-deep disabled:border-rule disabled:bg-transparent disabled:text-ink-faint',
  outline:
    'border-rule-strong px-4 hover:bg-sunk disabled:border-rule disabled:text-ink-faint disabled:hover:bg-transparent',
  word: 'border-transparent px-1 text-copper underline decoration-1 underline-offset-3 hover:text-copper-deep disabled:text-ink-faint',
}

export interface ButtonProps extends ComponentProps<'button'> {
  readonly variant?: Variant
  readonly icon?: ReactNode
  readonly kbd?: string
}

export function Button({
  variant = 'outline',
  icon,
  kbd,
  children,
  className = '',
  type = 'button',
  ...rest
}: ButtonProps) {
  return (
    <button
      type={type}
      className={`${base} ${look[variant]} ${className}`}
      {...(kbd ? { 'aria-keyshortcuts': kbd } : {})}
      {...rest}
    >
      {icon}
      {children}
      {kbd ? (
        <kbd aria-hidden className="rounded-cut border border-current px-1.5 text-small/4 font-normal opacity-80">
          {kbd}
        </kbd>
      ) : null}
    </button>
  )
}

export function ButtonLink({
  to,
  variant = 'outline',
  children,
}: {
  to: string
  variant?: Variant
  children: ReactNode
}) {
  return (
    <Link to={to} className={`${base} ${look[variant]}`}>
      {children}
    </Link>
  )
}

export function TextLink({ to, children }: { to: string; children: ReactNode }) {
  return (
    <Link to={to} className="text-copper underline decoration-1 underline-offset-3 hover:text-copper-deep">
      {children}
    </Link>
  )
}
