import { bls12_381 } from '@noble/curves/bls12-381.js'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { signDevelopmentRound } from '#shared/protocol/development-chain.ts'
import type { ObjectChange, TextChange } from '#tests/support/tampering/mutation.ts'

type Place = ObjectChange['at']
type Container = Record<string | number, unknown>

/** Makes a change in a parsed record, in place. Throws where the place is not there: a change must change something. */
export function changeObject(record: unknown, change: ObjectChange): void {
  const [holder, last] = find(record, change.at)
  const before = JSON.stringify(holder[last])
  switch (change.do) {
    case 'set':
      holder[last] = change.to
      break
    case 'delete':
      if (Array.isArray(holder)) holder.splice(Number(last), 1)
      else delete holder[last]
      break
    case 'copy': {
      const [from, name] = find(record, change.from)
      holder[last] = structuredClone(from[name])
      break
    }
    case 'swap': {
      const [other, name] = find(record, change.with)
      ;[holder[last], other[name]] = [other[name], holder[last]]
      break
    }
    case 'bump':
      holder[last] = Number(holder[last]) + change.by
      break
    case 'flip': {
      const hex = String(holder[last])
      holder[last] = hex.slice(0, -1) + (Number.parseInt(hex.slice(-1), 16) ^ 1).toString(16)
      break
    }
    case 'append':
      ;(holder[last] as unknown[]).push(change.value)
      break
    case 'upper-case':
      holder[last] = String(holder[last]).toUpperCase()
      break
    case 'beacon-signature': {
      const beacon = holder as { round: number }
      holder[last] =
        change.which === 'next-round' ? signDevelopmentRound(sha256, beacon.round + 1).signature : pointOffSubgroup()
      break
    }
  }
  if (JSON.stringify(holder[last]) === before) throw new Error(`${JSON.stringify(change)} changes nothing`)
}

function find(record: unknown, place: Place): [Container, string | number] {
  let holder = record as Container
  for (const name of place.slice(0, -1)) holder = holder[name] as Container
  const last = place.at(-1)
  if (last === undefined || typeof holder !== 'object' || holder === null)
    throw new Error(`no place ${place.join('.')}`)
  return [holder, last]
}

/** A compressed point of the curve of G1, y² = x³ + 4, that is outside the subgroup of order r: most points are. */
function pointOffSubgroup(): string {
  const { Fp } = bls12_381.fields
  for (let x = 1n; x < 100n; x++) {
    const hex = `8${x.toString(16).padStart(95, '0')}`
    try {
      Fp.sqrt(Fp.create(x ** 3n + 4n))
    } catch {
      continue
    }
    try {
      bls12_381.G1.Point.fromHex(hex)
    } catch {
      // It is on the curve, and the library, which looks at the subgroup, refuses it.
      return hex
    }
  }
  throw new Error('no such point was found')
}

/** Makes a change in a text. Throws where there is nothing to change. */
export function changeText(text: string, change: TextChange): string {
  const lines = text.split('\n')
  const need = (line: number) => {
    const found = lines[line]
    if (found === undefined) throw new Error(`no line ${line}`)
    return found
  }
  const join = () => lines.join('\n')
  const changed = (() => {
    switch (change.do) {
      case 'replace':
        return text.replace(change.find, () => change.with)
      case 'replace-all':
        return text.replaceAll(change.find, () => change.with)
      case 'append':
        return text + change.text
      case 'prepend':
        return change.text + text
      case 'cut-end':
        return text.slice(0, -change.characters)
      case 'swap-lines': {
        const [a, b] = [need(change.line), need(change.with)]
        lines[change.line] = b
        lines[change.with] = a
        return join()
      }
      case 'delete-line':
        need(change.line)
        lines.splice(change.line, 1)
        return join()
      case 'repeat-line':
        lines.splice(change.line, 0, need(change.line))
        return join()
      case 'pattern':
        return text.replace(new RegExp(change.find, 'm'), change.with)
    }
  })()
  if (changed === text) throw new Error(`${JSON.stringify(change)} changes nothing`)
  return changed
}
