/** Mail: enqueued with the fact it tells of, sent by a job, caught by a local mailbox where there is no server. */
import { createTransport } from 'nodemailer'
import { z } from 'zod'
import { simpleParser } from 'mailparser'
import { SMTPServer } from 'smtp-server'
import type { Deps } from '../../deps.ts'
import type { Reader } from '../db/client.ts'
import { demoMails } from '../db/schema/mail.ts'
import { enqueue } from '../queue/enqueue.ts'
import type { JobDefinition } from '../queue/run.ts'

export interface Message {
  readonly subject: string
  readonly text: string
  readonly html: string
}

const Mail = z.object({ to: z.string(), subject: z.string(), text: z.string(), html: z.string() })

export const enqueueMail = (tx: Reader, to: string, message: Message): Promise<void> =>
  enqueue(tx, 'mail.send', { to, ...message })

const escapes: Record<string, string> = { '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&#39;' }
const escapeHtml = (text: string): string => text.replace(/[&<>"']/g, (sign) => escapes[sign] ?? sign)

const paragraph = (html: string, style = ''): string => `<p style="margin:0 0 1em;${style}">${html}</p>`

/**
 * The same words as plain text and as HTML: paragraphs, then at most one link, then why it came.
 * The link's address stands in both as it is, so that a reader sees where it leads.
 */
export function writeMessage(
  subject: string,
  paragraphs: readonly string[],
  link?: { words: string; url: string },
  foot?: string,
): Message {
  const flat = subject.replace(/\s+/g, ' ').trim()
  const text = [
    ...paragraphs,
    ...(link ? [`${link.words}:\n${link.url}`] : []),
    ['--\nEvenburn', foot].filter(Boolean).join('\n'),
  ]
  const body = paragraphs.map((words) => paragraph(escapeHtml(words)))
  if (link) {
    const url = escapeHtml(link.url)
    body.push(
      paragraph(`<a href="${url}" style="color:#92471c">${escapeHtml(link.words)}</a><br>
<span style="font-size:13px;word-break:break-all">${url}</span>`),
    )
  }
  body.push(
    paragraph(
      ['Evenburn', foot].flatMap((words) => (words ? [escapeHtml(words)] : [])).join('<br>'),
      'font-size:13px;border-top:1px solid #918171;padding-top:.7em',
    ),
  )
  return {
    subject: flat,
    text: text.join('\n\n'),
    html: `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="color-scheme" content="light dark"><title>${escapeHtml(flat)}</title></head><body style="margin:0;padding:24px"><div style="font:16px/1.5 'Source Sans 3',sans-serif;max-width:36em;margin:0 auto">${body.join('\n')}</div></body></html>`,
  }
}

/** Sends one mail at once; for jobs only, which are tried again. In the demo a mailbox on loopback receives it over SMTP and stores it for the mail page. */
export async function sendMail(deps: Deps, mail: Message & { readonly to: string }): Promise<void> {
  const mailbox = deps.config.smtpUrl === null ? await openMailbox(deps) : null
  const transport = mailbox
    ? createTransport({ host: '127.0.0.1', port: mailbox.port, secure: false, ignoreTLS: true })
    : createTransport(deps.config.smtpUrl ?? '')
  try {
    await transport.sendMail({ from: deps.config.mailFrom, ...mail })
  } finally {
    transport.close()
    await mailbox?.close()
  }
}

async function openMailbox(deps: Deps): Promise<{ port: number; close: () => Promise<void> }> {
  const server = new SMTPServer({
    disabledCommands: ['STARTTLS', 'AUTH'],
    logger: false,
    onData(stream, _session, done) {
      void simpleParser(stream)
        .then(async (parsed) => {
          const to = Array.isArray(parsed.to) ? parsed.to[0] : parsed.to
          await deps.db.insert(demoMails).values({
            recipient: to?.text ?? '',
            subject: parsed.subject ?? '',
            text: parsed.text ?? '',
            html: typeof parsed.html === 'string' ? parsed.html : '',
          })
          done()
        })
        .catch((error: unknown) => done(error instanceof Error ? error : new Error(String(error))))
    },
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const address = server.server.address()
  if (address === null || typeof address === 'string') throw new Error('the demo mailbox has no port')
  return { port: address.port, close: () => new Promise((resolve) => server.close(() => resolve())) }
}

export const mailJobs: readonly JobDefinition[] = [
  { name: 'mail.send', handle: async (deps, payload) => sendMail(deps, Mail.parse(payload)) },
]
