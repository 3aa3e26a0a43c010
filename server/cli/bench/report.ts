import { performance } from 'node:perf_hooks'

/** One figure of a report and, where there is one, the goal that it is held to. */
export interface Measure {
  readonly name: string
  readonly milliseconds: number
  /** What the same work costs at least: the bare calls that it needs, measured beside it. */
  readonly bare?: { readonly what: string; readonly milliseconds: number }
  readonly goal?: { readonly kind: 'ratio' | 'milliseconds'; readonly most: number }
}

/** A section of the bench: a heading and its lines, printed as they are measured. */
export interface BenchSection {
  readonly name: string
  readonly title: string
  run(print: (line: string) => void): Promise<void>
}

/** What a bench measures: time on the wall, or, on a machine that is busy with other work, this process's time. */
export type BenchClock = () => number

export const wallClock: BenchClock = () => performance.now()

/** Milliseconds that all threads of this process have spent on a processor. */
export const processorClock: BenchClock = () => {
  const { user, system } = process.cpuUsage()
  return (user + system) / 1000
}

/** Runs something once and tells how long it took, in milliseconds. */
export async function timed<T>(
  clock: BenchClock,
  run: () => T | Promise<T>,
): Promise<{ value: T; milliseconds: number }> {
  const started = clock()
  const value = await run()
  return { value, milliseconds: clock() - started }
}

/** A measure in one line: time, bare time, ratio, goal and whether it is met. */
export function measureLine({ name, milliseconds, bare, goal }: Measure): string {
  let line = `  ${name.padEnd(24)} ${show(milliseconds)}`
  const ratio = bare === undefined ? undefined : milliseconds / bare.milliseconds
  if (bare !== undefined) line += `   bare ${bare.what} ${show(bare.milliseconds)}   ratio ${(ratio ?? 0).toFixed(2)}`
  if (goal === undefined) return line
  const value = goal.kind === 'ratio' ? (ratio ?? Number.POSITIVE_INFINITY) : milliseconds
  const limit = goal.kind === 'ratio' ? goal.most.toFixed(2) : `${goal.most} ms`
  return `${line}   goal ${limit} ${value <= goal.most ? 'met' : 'MISSED'}`
}

/**
 * How fast times grow over sizes, as the exponent of a power between the first and the last: 1 is linear, and n log n
 * over 10^4 to 10^6 is about 1.09.
 */
export function growth(points: readonly (readonly [size: number, milliseconds: number])[]): number {
  const [first, last] = [points[0], points.at(-1)]
  if (first === undefined || last === undefined || first[0] === last[0]) return Number.NaN
  return Math.log(last[1] / first[1]) / Math.log(last[0] / first[0])
}

function show(milliseconds: number): string {
  return `${milliseconds < 100 ? milliseconds.toFixed(1) : milliseconds.toFixed(0)} ms`.padStart(11)
}
