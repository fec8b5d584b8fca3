/** A question before what cannot be undone or tells another person; the focus starts on the harmless answer. */
import { Dialog } from 'radix-ui'
import { useRef } from 'react'
import { Button } from './button.tsx'

interface ConfirmProps {
  readonly open: boolean
  readonly question: string
  readonly consequence: string
  readonly verb: string
  readonly onConfirm: () => void
  readonly onClose: () => void
}

export function Confirm({ open, question, consequence, verb, onConfirm, onClose }: ConfirmProps) {
  const harmless = useRef<HTMLButtonElement>(null)
  return (
    <Dialog.Root open={open} onOpenChange={(next) => next || onClose()}>
      <Dialog.Portal>
        <Dialog.Overlay className="fixed inset-0 z-10 bg-ink/40" />
        <Dialog.Content
          onOpenAutoFocus={(event) => {
            event.preventDefault()
            harmless.current?.focus()
          }}
          className="fixed top-1/2 left-1/2 z-20 w-[min(30rem,calc(100vw-2rem))] -translate-x-1/2 -translate-y-1/2 rounded-cut border border-ink bg-sheet p-6"
        >
          <Dialog.Title className="text-head font-semibold">{question}</Dialog.Title>
          <Dialog.Description className="mt-2 text-ink-quiet">{consequence}</Dialog.Description>
          <div className="mt-5 flex flex-wrap gap-3">
            <Button variant="solid" onClick={onConfirm}>
              {verb}
            </Button>
            <Button ref={harmless} onClick={onClose}>
              Not yet
            </Button>
          </div>
        </Dialog.Content>
      </Dialog.Portal>
    </Dialog.Root>
  )
}
