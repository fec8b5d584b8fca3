/** Random secrets for links and tokens, of which only the SHA-256 is kept. */
import { createHash, randomBytes } from 'node:crypto'

export const newSecret = (prefix = ''): string => prefix + randomBytes(32).toString('base64url')
export const hashSecret = (secret: string): string => createHash('sha256').update(secret).digest('hex')
