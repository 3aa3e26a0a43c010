import { SEALING_POINTS, type SealingPoint } from '#server/commands/draws/complete-sealing.ts'

/** The writes of settling and of what follows it, in their order: after each of them a worker may die. */
export const CRASH_POINTS = [
  'round-noted',
  'result-written',
  'picks-written',
  'transcript-written',
  'labels-opened',
  'seed-erased',
  'state-drawn',
  'drawn-logged',
  'jobs-enqueued',
  'settling-committed',
  'archive-stored',
  'archive-noted',
  'mails-prepared',
  'mail-claimed',
  'mail-accepted',
  'mail-marked',
] as const

export type CrashPoint = (typeof CRASH_POINTS)[number] | SealingPoint

/** Those of sealing, which come before. */
export { SEALING_POINTS }

/** Called after each write. Does nothing but in a test that wants the worker dead at this point. */
export type AfterWrite = (point: CrashPoint) => void

export const goOn: AfterWrite = () => undefined

/** Kills this process at the point, as a power cut would: no handler runs, nothing is closed. Null: never. */
export function crashAt(point: string | null): AfterWrite {
  if (point === null) return goOn
  const known: readonly string[] = [...SEALING_POINTS, ...CRASH_POINTS]
  if (!known.includes(point)) {
    throw new Error(`EVENPENNY_CRASH_AT must be one of ${known.join(', ')}.`)
  }
  return (reached) => {
    if (reached !== point) return
    process.kill(process.pid, 'SIGKILL')
    // The signal arrives at the next system call: until then nothing more may be written.
    for (;;) Atomics.wait(new Int32Array(new SharedArrayBuffer(4)), 0, 0, 1000)
  }
}
