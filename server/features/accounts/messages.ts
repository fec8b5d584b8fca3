/** The accounts noun's mails: facts in, words out. */
import { writeMessage, type Message } from '../../platform/mail/send.ts'

export const resetMessage = (name: string, url: string): Message =>
  writeMessage(
    'Set a new password',
    [
      `${name}, somebody asked for a new password for your account. The link below works once, for one hour.`,
      'If it was not you, nothing needs doing: your password stays as it is.',
    ],
    { words: 'Set a new password', url },
  )

export const invitationMessage = (facts: { inviter: string; workshop: string; roles: string; url: string }): Message =>
  writeMessage(
    `${facts.inviter} invites you to ${facts.workshop}`,
    [
      `${facts.inviter} invites you to ${facts.workshop} as ${facts.roles}. There, drive logs become a fuel table that somebody checks before it goes into the engine.`,
      'The link below works once, for seven days.',
    ],
    { words: 'Take up the invitation', url: facts.url },
  )

export const passwordChangedMessage = (name: string): Message =>
  writeMessage('Your password was changed', [
    `${name}, your password was changed and every session was ended.`,
    'If it was not you, ask for a new password at once and tell the admin of your workshop.',
  ])
