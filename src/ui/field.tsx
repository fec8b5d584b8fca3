/** Fields: a line to write on, with its label above, its meaning below, and what is wrong in words. */
import { CircleAlert } from 'lucide-react'
import { useId, type ComponentProps, type ReactNode } from 'react'

interface Around {
  readonly label: string
  readonly hint?: ReactNode
  readonly error?: string | undefined
}

const box =
  'w-full rounded-cut border border-rule-strong bg-sheet px-3 text-read aria-invalid:border-2 aria-invalid:border-ink'

function Frame({ id, label, hint, error, children }: Around & { id: string; children: ReactNode }) {
  return (
    <div>
      <label htmlFor={id} className="mb-1 block font-semibold">
        {label}
      </label>
      {children}
      {error ? (
        <p id={`${id}-error`} className="mt-1 flex items-start gap-1.5 text-small font-semibold">
          <CircleAlert size={14} strokeWidth={2.25} aria-hidden className="mt-0.5 shrink-0" />
          {error}
        </p>
      ) : null}
      {hint ? (
        <p id={`${id}-hint`} className="mt-1 text-small text-ink-faint">
          {hint}
        </p>
      ) : null}
    </div>
  )
}

function described(id: string, { hint, error }: Pick<Around, 'hint' | 'error'>) {
  const ids = [error ? `${id}-error` : '', hint ? `${id}-hint` : ''].filter(Boolean).join(' ')
  return { id, ...(ids ? { 'aria-describedby': ids } : {}), ...(error ? { 'aria-invalid': true } : {}) }
}

export function Field({ label, hint, error, ...rest }: Around & Omit<ComponentProps<'input'>, 'id'>) {
  const id = useId()
  return (
    <Frame {...{ id, label, hint, error }}>
      <input {...rest} {...described(id, { hint, error })} className={`${box} h-(--control-h)`} />
    </Frame>
  )
}

export function TextArea({ label, hint, error, ...rest }: Around & Omit<ComponentProps<'textarea'>, 'id'>) {
  const id = useId()
  return (
    <Frame {...{ id, label, hint, error }}>
      <textarea {...rest} {...described(id, { hint, error })} className={`${box} block py-2`} />
    </Frame>
  )
}

export function Select({ label, hint, error, children, ...rest }: Around & Omit<ComponentProps<'select'>, 'id'>) {
  const id = useId()
  return (
    <Frame {...{ id, label, hint, error }}>
      <select {...rest} {...described(id, { hint, error })} className={`${box} h-(--control-h)`}>
        {children}
      </select>
    </Frame>
  )
}

export function Checkbox({
  label,
  hint,
  ...rest
}: Omit<Around, 'error'> & Omit<ComponentProps<'input'>, 'id' | 'type'>) {
  const id = useId()
  return (
    <div className="flex min-h-6 items-start gap-2.5 py-1">
      <input
        type="checkbox"
        {...rest}
        {...described(id, { hint })}
        className="mt-[3px] size-4 shrink-0 accent-copper"
      />
      <label htmlFor={id}>
        {label}
        {hint ? (
          <span id={`${id}-hint`} className="block text-small text-ink-faint">
            {hint}
          </span>
        ) : null}
      </label>
    </div>
  )
}
