// Runs bcrypt off the request thread: at cost 12 one call takes about half a second of a core.
import { parentPort } from 'node:worker_threads'
import { compareSync, hashSync, truncates } from 'bcryptjs'

parentPort?.on('message', (task) => {
  try {
    const value = task.kind === 'hash' ? hashSync(task.password, task.cost) : matches(task)
    parentPort?.postMessage({ value })
  } catch (error) {
    parentPort?.postMessage({ error: error instanceof Error ? error.message : String(error) })
  }
})

/** Bytes behind the 72nd would not count: who types more than was set types something else. */
function matches({ password, hash }) {
  return compareSync(password, hash) && !truncates(password)
}
