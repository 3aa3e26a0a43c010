// @ts-check
import { readdirSync, readFileSync, readlinkSync } from 'node:fs'

/**
 * When a process began, in clock ticks since the machine did: with its number, a name that is never used twice.
 * @param {number} pid
 * @returns {string | null} null when there is no such process, or only its entry that nobody has collected yet
 */
export function startOf(pid) {
  try {
    // proc(5): field 22, counted from behind the command, which may itself hold spaces and brackets.
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8')
    const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ')
    return fields[0] === 'Z' || fields[0] === 'X' ? null : (fields[19] ?? null)
  } catch {
    return null
  }
}

/**
 * @typedef {object} ProcessMark
 * @property {number} pid
 * @property {string | null} start
 */

/** @param {number} pid @returns {ProcessMark} */
export function markOf(pid) {
  return { pid, start: startOf(pid) }
}

/**
 * Whether the very process that was marked still runs, and not another that got its number.
 * @param {ProcessMark} mark
 */
export function stillRuns(mark) {
  return mark.start !== null && startOf(mark.pid) === mark.start
}

/**
 * The command line of a process, its words joined by spaces; empty when it cannot be read.
 * @param {number} pid
 */
export function commandOf(pid) {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, 'utf8').replaceAll('\0', ' ').trim()
  } catch {
    return ''
  }
}

/**
 * The processes whose working folder is this one: every process of a PostgreSQL cluster stands in its data folder.
 * @param {string} folder
 * @returns {number[]}
 */
export function processesIn(folder) {
  return everyPid().filter((pid) => {
    try {
      return readlinkSync(`/proc/${pid}/cwd`) === folder
    } catch {
      return false
    }
  })
}

/**
 * The process that listens on a TCP port, where this user may see it.
 * @param {number} port
 * @returns {{ pid: number, command: string } | null}
 */
export function listenerOn(port) {
  const wanted = new Set()
  for (const table of ['/proc/net/tcp', '/proc/net/tcp6']) {
    let text = ''
    try {
      text = readFileSync(table, 'utf8')
    } catch {
      continue
    }
    for (const line of text.split('\n').slice(1)) {
      const fields = line.trim().split(/\s+/)
      // 0A is LISTEN; the local address ends in the port as four hexadecimal digits.
      if (fields[3] === '0A' && Number.parseInt(fields[1]?.split(':').at(-1) ?? '', 16) === port) {
        wanted.add(`socket:[${fields[9]}]`)
      }
    }
  }
  if (wanted.size === 0) return null
  for (const pid of everyPid()) {
    try {
      for (const fd of readdirSync(`/proc/${pid}/fd`)) {
        if (wanted.has(readlinkSync(`/proc/${pid}/fd/${fd}`))) return { pid, command: commandOf(pid) }
      }
    } catch {
      // Another user's process, or one that has just ended.
    }
  }
  return null
}

function everyPid() {
  try {
    return readdirSync('/proc').map(Number).filter(Number.isInteger)
  } catch {
    return []
  }
}
