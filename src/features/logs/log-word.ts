/** The one word a log's state is shown by. */
import type { LogLine } from '../../../shared/contract/logs.ts'
import type { StatusWord } from '../../ui/status.tsx'

export function logWord(log: LogLine): StatusWord {
  if (log.state === 'received') return 'Waiting'
  if (log.state === 'reading') return 'Reading'
  if (log.state === 'needs-mapping') return 'Needs an answer'
  if (log.state === 'rejected') return 'Refused'
  if (log.state === 'failed') return 'Failed'
  return log.worstHealth === 'dead' ? 'Dead' : log.worstHealth === 'caution' ? 'Caution' : 'Ready'
}
