// @ts-check
import { siteAddress } from './environment.mjs'

/** @typedef {{ role: string, name: string, email: string, password: string, organisation: string | null }} SignIn */

/**
 * What npm start prints once everything runs.
 * @param {object} options
 * @param {string} options.data folder, as the reader would type it
 * @param {import('./ports.mjs').Ports} options.ports
 * @param {readonly SignIn[]} options.signIns
 */
export function welcome({ data, ports, signIns }) {
  const lines = [
    '',
    `Evenpenny runs. Open  ${siteAddress(ports)}/`,
    `Its mail is read at   http://localhost:${ports.mailPage}/  (no mail leaves this machine)`,
    `Logs and data are in  ${data}`,
  ]
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

/** @param {readonly string[][]} rows */
function table(rows) {
  const widths = /** @type {string[]} */ (rows[0]).map((_, column) =>
    Math.max(...rows.map((row) => row[column]?.length ?? 0)),
  )
  return rows.map((row) => `  ${row.map((cell, column) => cell.padEnd(widths[column] ?? 0)).join('  ')}`.trimEnd())
}
