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

/** The same words as plain text and as HTML: paragraphs, then at most one link. */
export function writeMessage(
  subject: string,
  paragraphs: readonly string[],
  link?: { words: string; url: string },
): Message {
  const text = [...paragraphs, ...(link ? [`${link.words}: ${link.url}`] : []), 'Evenburn'].join('\n\n')
  const body = paragraphs.map((words) => `<p>${escapeHtml(words)}</p>`).join('')
  const anchor = link ? `<p><a href="${escapeHtml(link.url)}">${escapeHtml(link.words)}</a></p>` : ''
  return {
    subject,
    text,
    html: `<div style="font:16px/1.5 sans-serif;color:#2a1f18;max-width:38em">${body}${anchor}<p style="color:#6d5f54">Evenburn</p></div>`,
  }
}

/** Sends one mail. In the demo a mailbox on loopback receives it over SMTP and stores it for the mail page. */
async function send(deps: Deps, mail: z.infer<typeof Mail>): Promise<void> {
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
  { name: 'mail.send', handle: async (deps, payload) => send(deps, Mail.parse(payload)) },
]
