/** The demo's mailbox: what would have gone out by mail, to read and to follow. */
import { useQuery } from '@tanstack/react-query'
import { formatDateTime } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Brand } from '../bench/brand.tsx'
import { accountQueries } from './queries.ts'

/** Words with the address at their end as a link. */
function Words({ text }: { text: string }) {
  const parts = text.split(/(https?:\/\/\S+)/)
  return (
    <p className="mt-2 max-w-(--measure) whitespace-pre-wrap">
      {parts.map((part, i) =>
        /^https?:/.test(part) ? (
          <a key={i} className="break-all text-copper underline" href={part}>
            {part}
          </a>
        ) : (
          part
        ),
      )}
    </p>
  )
}

export default function MailsPage() {
  usePageTitle('Mails of the demo')
  const mails = useQuery(accountQueries.mails())
  if (mails.isPending) return <Loading what="Opening the mailbox" />
  return (
    <>
      <header className="px-(--leaf-gutter) pt-4">
        <Brand />
      </header>
      <Leaf>
        <PageHead
          folio="Demo"
          title={mails.data?.mails.length ? `${mails.data.mails.length} mails were sent` : 'No mail was sent yet'}
          lead="Without a mail server the demo catches its mails here. With SMTP_URL they go out, and this page is not there."
          actions={<TextLink to="/">Back to the bench</TextLink>}
        />
        {mails.isError ? (
          <Banner title={mails.error.message}>This installation sends its mails for real.</Banner>
        ) : null}
        <Entry>
          {mails.data?.mails.length === 0 ? (
            <Empty title="Nothing here">Invite somebody, or send a revision for sign-off.</Empty>
          ) : null}
          <ul>
            {mails.data?.mails.map((mail) => (
              <li key={mail.id} className="border-b border-rule py-4">
                <h2 className="font-semibold">{mail.subject}</h2>
                <p className="text-small text-ink-faint">
                  to {mail.to}, {formatDateTime(mail.at)}
                </p>
                <Words text={mail.text} />
              </li>
            ))}
          </ul>
        </Entry>
      </Leaf>
    </>
  )
}
