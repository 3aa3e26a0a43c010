import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { formatSlipCode, readSlipCode, SLIP_LETTERS, slipCodeFromEntropy } from '#shared/entrants/slip-code.ts'
import { REFERENCE_ALPHABET } from '#shared/protocol/commitments.ts'

const codes = fc.uint8Array({ minLength: 12, maxLength: 12 }).map(slipCodeFromEntropy)
const groupAt = (index: number) => Math.floor(index / 4) + 1
const faultOf = (text: string) => {
  const read = readSlipCode(text)
  return read.ok ? null : read.error
}

describe('the code on a slip', () => {
  it('is read as people type it', () => {
    fc.assert(
      fc.property(codes, (code) => {
        expect(readSlipCode(code)).toEqual({ ok: true, value: code })
        const typed = ` ${formatSlipCode(code).toLowerCase().replaceAll('-', ' – ')} `
        expect(readSlipCode(typed)).toEqual({ ok: true, value: code })
      }),
    )
  })

  it('notices every single wrong letter, and says in which group', () => {
    fc.assert(
      fc.property(codes, (code) => {
        for (let at = 0; at < SLIP_LETTERS; at += 1) {
          for (const letter of REFERENCE_ALPHABET) {
            if (letter === code[at]) continue
            const wrong = code.slice(0, at) + letter + code.slice(at + 1)
            expect(faultOf(wrong)?.groups).toEqual([groupAt(at)])
          }
        }
      }),
      { numRuns: 20 },
    )
  })

  it('notices every two letters swapped, side by side or further apart', () => {
    fc.assert(
      fc.property(codes, (code) => {
        for (let left = 0; left < SLIP_LETTERS; left += 1) {
          for (let right = left + 1; right < SLIP_LETTERS; right += 1) {
            const [a, b] = [code[left], code[right]]
            if (a === b) continue
            const swapped = code.slice(0, left) + b + code.slice(left + 1, right) + a + code.slice(right + 1)
            expect(faultOf(swapped)?.groups).toEqual([...new Set([groupAt(left), groupAt(right)])])
          }
        }
      }),
      { numRuns: 50 },
    )
  })

  it('notices two groups swapped, even where both are right in themselves', () => {
    fc.assert(
      fc.property(codes, (code) => {
        const groups = formatSlipCode(code).split('-')
        const [a = '', b = '', ...rest] = groups
        expect(faultOf([b, a, ...rest].join('-'))?.groups).toEqual([1, 2])
      }),
    )
  })

  it('uses all 60 bits that it is given, and no other letters than the alphabet of references', () => {
    const one = slipCodeFromEntropy(new Uint8Array(12))
    const firsts = new Set(Array.from({ length: 32 }, (_, n) => slipCodeFromEntropy(new Uint8Array(12).fill(n))[0]))
    expect(firsts.size).toBe(32)
    expect(one).toMatch(/^[2-9A-HJ-NP-Z]{16}$/)
    expect(REFERENCE_ALPHABET).toHaveLength(32)
  })

  it('says what is wrong in words, one group or several', () => {
    const code = slipCodeFromEntropy(new Uint8Array(12).map((_, i) => i * 7))
    const other = (letter: string) => (letter === '2' ? '3' : '2')
    const wrong = other(code[0] ?? '') + code.slice(1, 8) + other(code[8] ?? '') + code.slice(9)
    expect(faultOf(wrong)?.message).toBe(
      'The first and third groups look mistyped. Compare with the slip, letter by letter.',
    )
    expect(faultOf(code.slice(1))?.message).toBe('A code has 16 letters, in four groups of four. This one has 15.')
    expect(faultOf(`${code.slice(0, 4)}0${code.slice(5)}`)?.message).toBe(
      'The second group has a sign that no code has, such as 0, 1, I or O.',
    )
  })
})
