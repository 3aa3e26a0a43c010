import { readWitnessArguments, UsageError, WITNESS_USAGE } from '#server/cli/witness/arguments.ts'
import { runWitness } from '#server/cli/witness/run-witness.ts'

/** An outside witness of logs, for another organisation to run: `npm run witness -- …`. */
try {
  const given = readWitnessArguments(process.argv.slice(2))
  const running = await runWitness(given, console.log)
  console.log(`The witness's key: ${running.vkey}`)
  for (const { name } of given.logs) console.log(`It follows ${name}.`)
  console.log(`It listens at ${running.url}/add-checkpoint`)
  for (const signal of ['SIGINT', 'SIGTERM'] as const) process.once(signal, () => void running.close())
} catch (error) {
  if (!(error instanceof UsageError)) {
    console.error(error instanceof Error ? error.message : error)
    process.exitCode = 1
  } else {
    console.error(`${error.message}\n\n${WITNESS_USAGE}`)
    process.exitCode = 2
  }
}
