import { runRehearse } from '#server/cli/rehearse/run-rehearse.ts'

process.exitCode = await runRehearse(process.argv.slice(2), { out: console.log, error: console.error })
