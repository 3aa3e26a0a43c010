// Runs bcrypt off the request thread: at cost 12 one call takes about half a second of a core.
import { parentPort } from 'node:worker_threads'
import { compareSync, hashSync } from 'bcryptjs'

parentPort?.on('message', (task) => {
  try {
    const value = task.kind === 'hash' ? hashSync(task.password, task.cost) : compareSync(task.password, task.hash)
    parentPort?.postMessage({ value })
  } catch (error) {
    parentPort?.postMessage({ error: error instanceof Error ? error.message : String(error) })
  }
})
