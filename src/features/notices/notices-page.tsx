/** What this person was told, newest first, and what reaches them how. */
import { useInfiniteQuery, useQuery } from '@tanstack/react-query'
import type { Notice, NoticeChoice, NoticeKind } from '../../../shared/contract/notices.ts'
import { formatDateTime } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { noticeQueries, useNoticeChanges } from './queries.ts'

const kindWords: Record<NoticeKind, string> = {
  'review-asked': 'A revision waits for your signature',
  'sent-back': 'A revision of yours was sent back',
  signed: 'A revision was signed',
  comment: 'Somebody comments or names you',
  'log-failed': 'A log of yours could not be read',
}

const noticesSentence = (unread: number, total: number): string =>
  total === 0 ? 'You have not been told anything yet' : unread === 0 ? 'You have read everything' : `${unread} unread`

export default function NoticesPage() {
  usePageTitle('Notices')
  const list = useInfiniteQuery(noticeQueries.list())
  const changes = useNoticeChanges()
  if (list.isPending) return <Loading what="Reading your notices" />
  if (list.isError) return <Banner title={list.error.message}>Load the page again.</Banner>
  const notices = list.data.pages.flatMap((page) => page.notices)
  const unread = list.data.pages[0]?.unread ?? 0
  const newest = notices[0]
  return (
    <Leaf>
      <PageHead
        folio="Notices"
        title={noticesSentence(unread, notices.length)}
        lead="What concerns you in this workshop. Each also comes by mail, unless you choose otherwise below."
        actions={
          newest && unread > 0 ? (
            <Button disabled={changes.read.isPending} onClick={() => changes.read.mutate(newest.id)}>
              Mark all as read
            </Button>
          ) : null
        }
      />
      <Entry>
        {notices.length === 0 ? (
          <Empty title="Nothing yet">
            You are told here when a revision waits for you, comes back, is signed or spoken of.
          </Empty>
        ) : (
          <ul>
            {notices.map((notice) => (
              <NoticeLine key={notice.id} notice={notice} />
            ))}
          </ul>
        )}
        {list.hasNextPage ? (
          <Button className="mt-4" disabled={list.isFetchingNextPage} onClick={() => void list.fetchNextPage()}>
            Earlier notices
          </Button>
        ) : null}
      </Entry>
      <Choices />
    </Leaf>
  )
}

const NoticeLine = ({ notice }: { notice: Notice }) => (
  <li className="border-b border-rule py-3">
    <p className={notice.read ? '' : 'font-semibold'}>
      {notice.read ? null : <i aria-hidden className="mr-2 inline-block size-[7px] bg-copper align-middle" />}
      <TextLink to={notice.path}>{notice.title}</TextLink>
      {notice.read ? null : <span className="sr-only">, unread</span>}
    </p>
    {notice.words ? (
      <p className="max-w-(--measure) whitespace-pre-line text-ink-quiet [overflow-wrap:anywhere]">{notice.words}</p>
    ) : null}
    <p className="text-small text-ink-faint">{formatDateTime(notice.at)}</p>
  </li>
)

function Choices() {
  const choices = useQuery(noticeQueries.choices())
  const changes = useNoticeChanges()
  if (choices.isError) return <Banner title={choices.error.message}>Your choices are as they were.</Banner>
  const box = (choice: NoticeChoice, way: 'inApp' | 'mail', words: string) => (
    <td>
      <label className="flex min-h-6 items-center gap-2">
        <input
          type="checkbox"
          className="size-4 accent-copper"
          checked={choice[way]}
          disabled={changes.choose.isPending}
          aria-label={`${kindWords[choice.kind]}: ${words}`}
          onChange={(event) => changes.choose.mutate({ ...choice, [way]: event.target.checked })}
        />
        <span className="hidden phone:inline">{words}</span>
      </label>
    </td>
  )
  return (
    <Entry title="What reaches you" note="in this workshop">
      {changes.choose.isError ? <Banner title={changes.choose.error.message}>Nothing was changed.</Banner> : null}
      <Ledger caption="Which notices reach you, and how" head={['When', 'In this list', 'By mail']} stack>
        {choices.data?.choices.map((choice) => (
          <tr key={choice.kind}>
            <th scope="row" className="wide-cell">
              {kindWords[choice.kind]}
            </th>
            {box(choice, 'inApp', 'in this list')}
            {box(choice, 'mail', 'by mail')}
          </tr>
        ))}
      </Ledger>
    </Entry>
  )
}
