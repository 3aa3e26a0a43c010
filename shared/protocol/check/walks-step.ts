import { equalBytes, utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { memberLines } from '#shared/protocol/check/member-lines.ts'
import { StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckState, type CheckStep, throwIfCancelled } from '#shared/protocol/check/state.ts'
import { type DrawFlips, type DrawPick, drawPicks, sameAward } from '#shared/protocol/draw.ts'
import { deriveDrawKey } from '#shared/protocol/draw-key.ts'
import { parseTranscriptLine, transcriptLine } from '#shared/protocol/transcript.ts'

const MEMBER = 'transcript.jsonl'

/** Step 9: every coin of every pick from the flips, in order, with award, leaf, remaining and tickets (sections 5 to 8). */
export const checkWalks: CheckStep = async (state) => {
  const { prizes, reserves, rule } = state.seal
  state.drawKey = drawKeyOf(state)
  const picks = drawPicks(state.tools.sha256, {
    tickets: state.entries.tickets,
    rule,
    prizes,
    reserves,
    flips: flipsOf(state),
  })
  const stated = state.result.picks
  const digest = state.tools.createSha256()
  const lines = memberLines(state.source.open(MEMBER), digest)
  let made = 0
  let coins = 0
  let flips = 0
  try {
    for (let next = picks.next(); next.done !== true; next = picks.next()) {
      const pick = next.value
      const line = await lines.next()
      if (line.done) throw missing(`${MEMBER} line ${made + 1}`, `There is no line for pick ${made}.`)
      const expected = transcriptLine(pick)
      if (!equalBytes(line.value, utf8(expected))) throw lineDiffers(line.value, pick, expected)
      compare(state, pick)
      coins += pick.coins.length
      for (const coin of pick.coins) flips += coin[2].length
      made++
      if (made % 256 === 0) {
        throwIfCancelled(state)
        state.progress(made, stated.length)
        await state.tools.pause?.()
      }
    }
    if (stated.length > made) {
      throw new StepFailure('too-many-picks', `result.json picks[${made}]`, `The draw has only ${made} picks.`)
    }
    if (!(await lines.next()).done) {
      throw new StepFailure('too-many-picks', `${MEMBER} line ${made + 1}`, `The draw has only ${made} picks.`)
    }
  } finally {
    state.walked = { picks: made, coins, flips }
    // Closes the archive's stream where a failure left it in the middle.
    await lines.return()
  }
  state.transcriptDigest = toHex(digest.digest())
  state.progress(made, made)
  return `${made} picks with ${coins} coins and ${flips} flips, each as the sources give it.`
}

function drawKeyOf(state: CheckState): Uint8Array | null {
  const { seed } = state.result.reveal
  if (seed === null) return null
  const { sealDigest, beaconRandomness, tossBits } = state
  return deriveDrawKey(state.tools.sha256, { sealDigest, seed: hexBytes(seed, 32), beaconRandomness, tossBits })
}

function flipsOf({ drawKey, tossBits }: CheckState): DrawFlips {
  return drawKey === null ? { kind: 'tossed', bits: tossBits ?? [] } : { kind: 'derived', drawKey }
}

/** The result's pick against the walk; `tickets` are the sealed ones. */
function compare(state: CheckState, pick: DrawPick): void {
  const at = `result.json picks[${pick.pick}]`
  const stated = state.result.picks[pick.pick]
  if (stated === undefined) {
    throw new StepFailure('picks-missing', at, 'The result ends before the last pick of the draw.')
  }
  const differs = (
    code: 'pick-order' | 'leaf-wrong' | 'remaining-wrong' | 'tickets-wrong',
    name: string,
    found: number,
    truth?: number,
  ) => {
    if (found !== truth) throw new StepFailure(code, `${at}.${name}`, `It is ${found}, and the coins give ${truth}.`)
  }
  differs('pick-order', 'pick', stated.pick, pick.pick)
  if (!sameAward(stated.award, pick.award)) {
    throw new StepFailure('award-wrong', `${at}.award`, 'This is not the award that comes next in the seal.')
  }
  differs('leaf-wrong', 'leaf', stated.leaf, pick.leaf)
  differs('remaining-wrong', 'remaining', stated.remaining, pick.remaining)
  differs('tickets-wrong', 'tickets', stated.tickets, state.entries.tickets[pick.leaf])
}

function missing(at: string, message: string): StepFailure {
  return new StepFailure('line-missing', at, message)
}

/** Names the first coin that differs, where the line can be read at all. */
function lineDiffers(line: Uint8Array, pick: DrawPick, expected: string): StepFailure {
  const at = `${MEMBER} line ${pick.pick + 1}`
  const stated = parseTranscriptLine(line.at(-1) === 0x0a ? line.subarray(0, -1) : line)
  if (!stated.ok) return new StepFailure('line-wrong', at, `The line is not ${expected.slice(0, 60)}…`)
  const show = (coin: unknown) => (coin === undefined ? 'missing' : JSON.stringify(coin))
  const length = Math.max(stated.value.coins.length, pick.coins.length)
  for (let index = 0; index < length; index++) {
    const [found, truth] = [show(stated.value.coins[index]), show(pick.coins[index])]
    if (found === truth) continue
    return new StepFailure('coin-wrong', `${at} coins[${index}]`, `This coin is ${found}, and the flips give ${truth}.`)
  }
  if (stated.value.leaf !== pick.leaf) {
    const message = `The line says leaf ${stated.value.leaf}, and the coins lead to leaf ${pick.leaf}.`
    return new StepFailure('leaf-wrong', `${at} leaf`, message)
  }
  return new StepFailure('line-wrong', at, `The line is not ${expected.slice(0, 60)}…`)
}
