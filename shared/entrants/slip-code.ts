import { ok, type Failure, type Result } from '../bytes/result.ts'
import { REFERENCE_ALPHABET } from '../protocol/commitments.ts'

/**
 * The code on a printed slip: four groups of four letters of the reference alphabet, which has no 0, 1, I or O. The last
 * letter of each group checks it, so that a mistyped group is told without looking anything up. 12 free letters are 60
 * bits.
 *
 * A group (x, y, z, c) at place g holds where αx + α²y + α³z + c = α^(4+g) in the field of 32 elements (polynomial
 * x⁵ + x² + 1, α = 2). No weight is 0 and no two are equal, so that every wrong letter and every two letters swapped
 * within a group show; two letters swapped across a hyphen are a wrong letter in both groups; and the right-hand side
 * differs from group to group, so that swapped groups show too.
 */

export const SLIP_GROUPS = 4
export const SLIP_LETTERS = 16
const GROUP = 4
const FREE = 3

/** Why a text is no slip code. `groups` count from 1; empty where it cannot be told which are at fault. */
export interface SlipCodeFault extends Failure<'length' | 'letter' | 'check'> {
  readonly groups: readonly number[]
}

/** A code out of 12 bytes of entropy, of which 5 bits each are used: 16 letters without hyphens. */
export function slipCodeFromEntropy(entropy: Uint8Array): string {
  if (entropy.length !== SLIP_GROUPS * FREE) throw new RangeError('a slip code takes 12 bytes')
  let code = ''
  for (let group = 0; group < SLIP_GROUPS; group += 1) {
    const free = [...entropy.subarray(group * FREE, (group + 1) * FREE)].map((byte) => byte & 31)
    code += [...free, checkValue(free, group)].map((value) => REFERENCE_ALPHABET[value]).join('')
  }
  return code
}

/** `K7QF-2MPR-…`: as it is printed. */
export const formatSlipCode = (code: string): string => (code.match(/.{1,4}/g) ?? []).join('-')

/** Reads a code as people type it: small letters, spaces and hyphens anywhere. Nothing is looked up. */
export function readSlipCode(text: string): Result<string, SlipCodeFault> {
  const letters = text.toUpperCase().replace(/[\s\u2010-\u2015\u2212.-]/g, '')
  const strange = groupsOf(letters, (group) => ![...group].every((letter) => REFERENCE_ALPHABET.includes(letter)))
  if (letters.length !== SLIP_LETTERS) {
    const words = `A code has 16 letters, in four groups of four. This one has ${letters.length}.`
    return fault('length', words, [])
  }
  if (strange.length > 0) {
    return fault('letter', `${named(strange, 'has', 'have')} a sign that no code has, such as 0, 1, I or O.`, strange)
  }
  const wrong = groupsOf(letters, (group, index) => {
    const values = [...group].map((letter) => REFERENCE_ALPHABET.indexOf(letter))
    return values[FREE] !== checkValue(values.slice(0, FREE), index)
  })
  if (wrong.length > 0) {
    const words = `${named(wrong, 'looks', 'look')} mistyped. Compare with the slip, letter by letter.`
    return fault('check', words, wrong)
  }
  return ok(letters)
}

function fault(
  code: SlipCodeFault['code'],
  message: string,
  groups: readonly number[],
): { readonly ok: false; readonly error: SlipCodeFault } {
  return { ok: false, error: { code, at: 'code', message, groups } }
}

/** "The second group looks", "The first and third groups look". */
function named(groups: readonly number[], one: string, many: string): string {
  const names = groups.map((group) => ['first', 'second', 'third', 'fourth'][group - 1] ?? '')
  const last = names.pop() ?? ''
  return names.length === 0 ? `The ${last} group ${one}` : `The ${names.join(', ')} and ${last} groups ${many}`
}

function groupsOf(letters: string, faulty: (group: string, index: number) => boolean): number[] {
  const found: number[] = []
  for (let index = 0; index * GROUP < letters.length; index += 1) {
    if (faulty(letters.slice(index * GROUP, (index + 1) * GROUP), index)) found.push(index + 1)
  }
  return found
}

function checkValue(free: readonly number[], group: number): number {
  return free.reduce((sum, value, index) => sum ^ times(value, power(index + 1)), power(4 + group))
}

/** α to the n-th. */
function power(n: number): number {
  let value = 1
  for (let i = 0; i < n; i += 1) value = times(value, 2)
  return value
}

/** Product in the field of 32 elements. */
function times(a: number, b: number): number {
  let product = 0
  let shifted = a
  for (let bit = b; bit > 0; bit >>= 1) {
    if (bit & 1) product ^= shifted
    shifted <<= 1
    if (shifted & 32) shifted ^= 0b100101
  }
  return product
}
