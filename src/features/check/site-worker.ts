/** Starts the worker from a file of the site. */
export function siteWorker(): Worker {
  return new Worker(new URL('./worker/check-worker.ts', import.meta.url), { type: 'module', name: 'check' })
}
