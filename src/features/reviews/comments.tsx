/** Comments on a revision: what was said about which cell, settling it, and adding one. */
import { useState } from 'react'
import type { Comment } from '../../../shared/contract/reviews.ts'
import { formatDateTime } from '../../lib/format.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Select, TextArea } from '../../ui/field.tsx'
import { Note } from '../../ui/note.tsx'
import type { useReviewMoves } from './queries.ts'

type Moves = ReturnType<typeof useReviewMoves>

interface CommentsProps {
  readonly comments: readonly Comment[]
  readonly cellName: (cell: number) => string
  readonly mayResolve: (comment: Comment) => boolean
  readonly moves: Moves
}

export function Comments({ comments, cellName, mayResolve, moves }: CommentsProps) {
  if (comments.length === 0) return <p className="text-ink-quiet">Nobody has commented yet.</p>
  return (
    <>
      {moves.resolve.isError ? <Banner title={moves.resolve.error.message}>Load the page again.</Banner> : null}
      <ul className="flex flex-col gap-5">
        {comments.map((comment) => (
          <li key={comment.id}>
            <Note
              icon="comment"
              kind="says"
              head={comment.author.name}
              source={`${comment.cell === null ? 'On the whole revision' : cellName(comment.cell)}, ${formatDateTime(comment.at)} · ${comment.resolvedAt ? `settled${comment.resolvedBy ? ` by ${comment.resolvedBy}` : ''}` : 'open'}`}
            >
              <p>“{comment.text}”</p>
            </Note>
            {comment.resolvedAt === null && mayResolve(comment) ? (
              <Button
                variant="word"
                disabled={moves.resolve.isPending}
                onClick={() => moves.resolve.mutate(comment.id)}
                aria-label={`Settle the comment by ${comment.author.name}: ${comment.text}`}
              >
                Settle
              </Button>
            ) : null}
          </li>
        ))}
      </ul>
    </>
  )
}

interface AddCommentProps {
  readonly cell: number | null
  readonly cellName: (cell: number) => string
  readonly mentionable: readonly { readonly id: string; readonly name: string }[]
  readonly moves: Moves
}

export function AddComment({ cell, cellName, mentionable, moves }: AddCommentProps) {
  const [text, setText] = useState('')
  const named = mentionable.filter(({ name }) => text.includes(`@${name}`))
  return (
    <form
      aria-label="Add a comment"
      className="mt-5 max-w-(--measure)"
      onSubmit={(event) => {
        event.preventDefault()
        moves.comment.mutate({ cell, text }, { onSuccess: () => setText('') })
      }}
    >
      <TextArea
        label={cell === null ? 'Comment on the whole revision' : `Comment on ${cellName(cell)}`}
        hint={
          cell === null
            ? 'Select a cell in the table to speak of that cell'
            : 'Press Escape in the table to speak of the whole revision'
        }
        rows={2}
        maxLength={1000}
        value={text}
        onChange={(event) => setText(event.target.value)}
      />
      <div className="mt-2 max-w-60">
        <Select
          label="Name somebody"
          hint={named.length > 0 ? `Told: ${named.map(({ name }) => name).join(', ')}` : 'Whoever is named is told'}
          value=""
          onChange={({ target }) => setText(`${text}${text === '' || text.endsWith(' ') ? '' : ' '}@${target.value} `)}
        >
          <option value="">nobody in particular</option>
          {mentionable.map(({ id, name }) => (
            <option key={id} value={name}>
              {name}
            </option>
          ))}
        </Select>
      </div>
      {moves.comment.isError ? <Banner title={moves.comment.error.message}>Your words are kept.</Banner> : null}
      <Button className="mt-3" type="submit" disabled={text.trim() === '' || moves.comment.isPending}>
        Add the comment
      </Button>
    </form>
  )
}
