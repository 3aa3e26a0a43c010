// npm test: sets up what is missing, runs every check and ends with one line, "N passed, N failed".
import { nodeVersionProblem } from './lib/node-version.mjs'

const problem = nodeVersionProblem(process.versions.node)
if (problem) {
  console.log(problem)
  console.log('0 passed, 1 failed')
  process.exitCode = 1
} else {
  const { testCommand } = await import('./lib/test-command.mjs')
  process.exitCode = await testCommand(process.argv.slice(2), process.env)
}
