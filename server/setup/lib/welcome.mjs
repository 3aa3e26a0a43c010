// @ts-check
import { siteAddress } from './environment.mjs'

/** @typedef {{ role: string, name: string, email: string, password: string, organisation: string | null }} SignIn */

/** @typedef {{ title: string, slug: string, drawAt: string }} NextDraw */

/** Less than this ahead, a demo draw is worth waiting for, in milliseconds. */
const WORTH_WAITING = 10 * 60_000

/**
 * What npm start prints once everything runs.
 * @param {object} options
 * @param {string} options.data folder, as the reader would type it
 * @param {import('./ports.mjs').Ports} options.ports
 * @param {readonly SignIn[]} options.signIns
 * @param {NextDraw | null} options.nextDraw the demo draw that was to be drawn first
 * @param {Date} options.now
 */
export function welcome({ data, ports, signIns, nextDraw, now }) {
  const lines = [
    '',
    `Evenpenny runs. Open  ${siteAddress(ports)}/`,
    `Its mail is read at   http://localhost:${ports.mailPage}/  (no mail leaves this machine)`,
    `Logs and data are in  ${data}`,
  ]
  const ahead = nextDraw ? Date.parse(nextDraw.drawAt) - now.getTime() : 0
  if (nextDraw && ahead > 0 && ahead < WORTH_WAITING) {
    lines.push(
      '',
      `A demo draw is drawn by itself in ${inMinutes(ahead)}: ${nextDraw.title}. Watch it at`,
      `  ${siteAddress(ports)}/draws/${nextDraw.slug}`,
    )
  }
  if (signIns.length > 0) {
    const rows = signIns.map(({ role, name, email, password, organisation }) => [
      role,
      email,
      password,
      name,
      organisation ?? '',
    ])
    lines.push('', 'Demo sign-ins:', ...table([['Role', 'E-mail', 'Password', 'Name', 'Organisation'], ...rows]))
  }
  lines.push('', 'Press Ctrl-C to stop.')
  return lines.join('\n')
}

/** @param {number} ms */
function inMinutes(ms) {
  const minutes = Math.round(ms / 60_000)
  if (minutes === 0) return 'less than a minute'
  return minutes === 1 ? 'about a minute' : `about ${minutes} minutes`
}

/** @param {readonly string[][]} rows */
function table(rows) {
  const widths = /** @type {string[]} */ (rows[0]).map((_, column) =>
    Math.max(...rows.map((row) => row[column]?.length ?? 0)),
  )
  return rows.map((row) => `  ${row.map((cell, column) => cell.padEnd(widths[column] ?? 0)).join('  ')}`.trimEnd())
}
