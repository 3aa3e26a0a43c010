import type { ImportView } from '#shared/schemas/api/office.ts'

type ImportProblem = ImportView['errors'][number]

/** Errors of one kind: the first of them in words, and every row that has it, in order. */
export interface ProblemGroup {
  readonly message: string
  readonly column: string | null
  readonly rows: readonly number[]
}

/** From this many of a kind on, errors are told together. */
const TOGETHER = 4

/**
 * Groups errors that say the same of different rows, whatever they quote, once there are many of them; fewer are told
 * one by one. In the order in which each kind first comes in the file.
 */
export function groupProblems(errors: readonly ImportProblem[]): readonly ProblemGroup[] {
  const kinds = new Map<string, ImportProblem[]>()
  for (const error of errors) {
    const kind = `${error.column ?? ''} ${bare(error.message).replace(/"(?:[^"\\]|\\.)*"/g, '""')}`
    const known = kinds.get(kind)
    if (known) known.push(error)
    else kinds.set(kind, [error])
  }
  return [...kinds.values()]
    .flatMap((alike): ProblemGroup[] => {
      const [first] = alike
      if (!first) return []
      if (alike.length < TOGETHER) return alike.map((error) => group(error, [error.row]))
      return [group(first, [...new Set(alike.map(({ row }) => row))])]
    })
    .sort((a, b) => (a.rows[0] ?? 0) - (b.rows[0] ?? 0))
}

function group({ message, column }: ImportProblem, rows: readonly number[]): ProblemGroup {
  const words = bare(message)
  return { message: words.charAt(0).toUpperCase() + words.slice(1), column, rows }
}

/** A message without the row that it begins with: the row stands beside it. */
const bare = (message: string) => message.replace(/^Row \d+: /, '')
