// npm start: sets up what is missing and runs the whole product on this machine. Nothing but the check of the Node.js
// version is loaded at first, so that an old one can read this far.
import { nodeVersionProblem } from './lib/node-version.mjs'

const problem = nodeVersionProblem(process.versions.node)
if (problem) {
  console.error(problem)
  process.exitCode = 1
} else {
  const { startCommand } = await import('./lib/start-command.mjs')
  process.exitCode = await startCommand(process.argv.slice(2), process.env)
}
