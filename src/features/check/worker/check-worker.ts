import type { FromWorker, ToWorker } from '../messages.ts'
import type { CheckedArchive } from './checked-draw.ts'
import { browserTools } from './fast-tools.ts'
import { answer, runCheck } from './run-check.ts'

// The entry of the worker: one for each check, ended by the page.
let checking: Promise<CheckedArchive | null> = Promise.resolve(null)
const post = (message: FromWorker) => self.postMessage(message)

self.addEventListener('message', (event: MessageEvent<ToWorker>) => {
  const message = event.data
  if (message.kind === 'start') {
    checking = browserTools().then((machine) => runCheck(message, machine, post))
    return
  }
  void checking.then((checked) => (checked ? answer(checked, message, post) : undefined))
})
