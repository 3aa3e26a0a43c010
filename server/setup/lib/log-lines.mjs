// @ts-check
/** pino's number for a warning; errors and fatal ones are higher. */
const WARNING = 40

/**
 * What of a service's log line belongs on the terminal: the message of a warning or an error, and whatever is not a log
 * record on standard error. Null for the rest.
 * @param {string} line
 * @param {boolean} isError it came on standard error
 * @returns {string | null}
 */
export function readLogLine(line, isError) {
  const record = parseRecord(line)
  if (record === null) return isError && line.trim() !== '' ? line : null
  const level = Number(record.level)
  if (!(level >= WARNING)) return null
  const error = /** @type {{ message?: unknown } | undefined} */ (record.err)
  const details =
    error && typeof error.message === 'string' && error.message !== record.msg ? ` (${error.message})` : ''
  return `${level > WARNING ? 'error' : 'warning'}: ${record.msg ?? line}${details}`
}

/** @param {string} line @returns {Record<string, unknown> | null} */
function parseRecord(line) {
  if (!line.startsWith('{')) return null
  try {
    const value = JSON.parse(line)
    return typeof value === 'object' && value !== null && 'level' in value ? value : null
  } catch {
    return null
  }
}
