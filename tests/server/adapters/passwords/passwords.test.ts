import { hashSync } from 'bcryptjs'
import { afterAll, describe, expect, it } from 'vitest'
import { createPasswords, PasswordsBusyError } from '#server/adapters/passwords/passwords.ts'

const passwords = createPasswords({ cost: 6, threads: 1 })
afterAll(() => passwords.close())

describe('passwords', () => {
  it('checks what it hashed, and what bcryptjs itself hashed', async () => {
    const hash = await passwords.hash('three unrelated words')
    expect(hash).toMatch(/^\$2b\$06\$/)
    expect(await passwords.verify('three unrelated words', hash)).toBe(true)
    expect(await passwords.verify('three unrelated word', hash)).toBe(false)
    expect(await passwords.verify('another', hashSync('another', 4))).toBe(true)
  })

  it('reproduces the published bcrypt vector for "U*U" (Openwall crypt_blowfish, wrapper.c, from memory)', async () => {
    const vector = '$2a$05$CCCCCCCCCCCCCCCCCCCCC.E5YPO9kmyuRGyh0XouQYb4YMJKvyOeW'
    expect(await passwords.verify('U*U', vector)).toBe(true)
    expect(await passwords.verify('U*V', vector)).toBe(false)
  })

  it('takes no password that only begins like the right one, though bcrypt reads 72 bytes', async () => {
    const longest = 'x'.repeat(72)
    const hash = await passwords.hash(longest)
    expect(await passwords.verify(longest, hash)).toBe(true)
    expect(await passwords.verify(`${longest}y`, hash)).toBe(false)
  })

  it('never lets anybody into an account that does not exist, and works as long on it', async () => {
    const hash = await passwords.hash('a password of somebody')
    const time = async (against: string | null) => {
      const start = performance.now()
      for (let i = 0; i < 15; i++) expect(await passwords.verify('a wrong password', against)).toBe(false)
      return performance.now() - start
    }
    await time(null)
    const ratio = (await time(null)) / (await time(hash))
    expect(ratio).toBeGreaterThan(0.5)
    expect(ratio).toBeLessThan(2)
  })

  it('keeps the request thread free', async () => {
    const slow = createPasswords({ cost: 12, threads: 1 })
    let turns = 0
    const timer = setInterval(() => turns++, 5)
    await slow.hash('a long and slow password')
    clearInterval(timer)
    await slow.close()
    expect(turns).toBeGreaterThan(5)
  })

  it('says that it is busy rather than queue without end', async () => {
    const tries = Array.from({ length: 120 }, () => passwords.verify('x', null))
    const outcomes = await Promise.allSettled(tries)
    const refused = outcomes.filter((outcome) => outcome.status === 'rejected')
    expect(refused.length).toBeGreaterThan(0)
    expect(refused.every((outcome) => outcome.reason instanceof PasswordsBusyError)).toBe(true)
  })
})
