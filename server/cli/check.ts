import { runCheck } from '#server/cli/check/run-check.ts'

process.exitCode = await runCheck(process.argv.slice(2), { out: console.log, error: console.error })
