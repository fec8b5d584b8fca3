/** The web process: listens until it is told to stop, then finishes what it is answering. */
import { createServer } from 'node:http'
import { buildApp } from './app.ts'
import { readConfig } from './config.ts'
import { buildDeps, closeDeps } from './deps.ts'

const config = readConfig(process.env)
const deps = buildDeps(config)
const server = createServer(buildApp(deps, 'dist'))
server.listen(config.port, config.host, () => deps.log.info({ url: config.publicUrl }, 'web process is listening'))

let stopping = false
function stop(): void {
  if (stopping) return
  stopping = true
  server.close(() => void closeDeps(deps).then(() => process.exit(0)))
  server.closeIdleConnections()
  // An open download must not keep the process alive for ever.
  setTimeout(() => server.closeAllConnections(), 5_000).unref()
}
process.on('SIGTERM', stop)
process.on('SIGINT', stop)
