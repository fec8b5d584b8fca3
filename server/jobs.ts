/** Every job there is, gathered from the platform and the features. */
import { accountJobs } from './features/accounts/jobs.ts'
import { logJobs } from './features/logs/jobs.ts'
import { proposalJobs } from './features/proposals/jobs.ts'
import { mailJobs } from './platform/mail/send.ts'
import type { JobDefinition } from './platform/queue/run.ts'

export const jobs: readonly JobDefinition[] = [...mailJobs, ...accountJobs, ...logJobs, ...proposalJobs]
