// Starts the whole product on free ports for the browser tests, from the production build, on a database and a data folder
// of its own, prints one line of JSON with the addresses once it is ready, and takes it all down on SIGTERM or when its
// standard input ends. What else it prints goes to standard error.
import { browserStack } from './lib/browser-stack-command.mjs'

process.exitCode = await browserStack(process.env)
