/** `npm run bench`: sets up, then runs the benchmark with what was asked for. */
import { runShown } from './commands.mjs'
import { installPackages } from './packages.mjs'
import { root } from './setup.mjs'

installPackages(root)
process.exit(
  await runShown(process.execPath, ['--import', 'tsx', 'tests/bench/bench.ts', ...process.argv.slice(2)], {
    cwd: root,
  }),
)
