import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import type { CheckStep } from '#shared/protocol/check/state.ts'
import { verifyBeaconRound } from '#shared/protocol/beacon.ts'
import { drawPicks } from '#shared/protocol/draw.ts'
import { networkOf } from '#shared/protocol/networks.ts'
import { seedCommitment } from '#shared/protocol/seal.ts'
import { checkTosses, tossBits } from '#shared/protocol/tosses.ts'

/** Step 6: the seed against its commitment (PROTOCOL section 3). */
export const checkSeed: CheckStep = ({ tools, seal, result }) => {
  const { seed } = result.reveal
  if (seed === null) return 'The seal names no seed.'
  if (toHex(seedCommitment(tools.sha256, hexBytes(seed, 32))) !== seal.sources.seedCommit) {
    throw new StepFailure('seed-mismatch', 'result.json reveal.seed', 'This is not the seed that was sealed.')
  }
  return 'The seed is the one to which the seal commits.'
}

/** Step 7: the beacon round's number and signature (PROTOCOL section 3). */
export const checkBeacon: CheckStep = (state) => {
  const sealed = state.seal.sources.beacon
  const { beacon } = state.result.reveal
  state.beaconRandomness = null
  if (sealed === null || beacon === null) return 'The seal names no beacon.'
  if (beacon.round !== sealed.round) {
    throw new StepFailure('beacon-round', 'result.json reveal.beacon.round', `The seal names round ${sealed.round}.`)
  }
  const round = verifyBeaconRound(state.tools.sha256, { ...beacon, publicKey: sealed.publicKey })
  state.beaconRandomness = need(round, 'result.json reveal.beacon')
  const network =
    networkOf(sealed) === 'development' ? 'the development chain, whose secret is public' : 'drand quicknet'
  return `Round ${beacon.round} is signed by ${network}.`
}

/** Step 8: the tosses: rounds, minimum, none too many (PROTOCOL sections 3 and 4). */
export const checkTossRounds: CheckStep = (state) => {
  const plan = state.seal.sources.tosses
  const rounds = state.result.reveal.tosses
  state.tossBits = null
  if (plan === null || rounds === null) return 'The seal names no tosses.'
  const where = 'result.json reveal'
  const tossed = state.seal.sources.flips === 'tossed'
  // Letters and lengths first: nothing can be walked with rounds that are not rounds.
  const shape = checkTosses(plan, rounds, null)
  if (!shape.ok && !(tossed && shape.error.code === 'too-many-rounds')) need(shape, where)
  const flips = tossed ? flipsOfTossedWalks() : null
  state.tossBits = need(checkTosses(plan, rounds, flips), where)
  return `${rounds.length} rounds of ${plan.roundLength} tosses give ${state.tossBits.length} fair bits; none is too many.`

  /** Under `tossed` the rounds must also suffice for the walks; step 9 compares these coin by coin. */
  function flipsOfTossedWalks(): number {
    const { prizes, reserves, rule } = state.seal
    const input = { tickets: state.entries.tickets, prizes, reserves, rule }
    const walks = drawPicks(state.tools.sha256, { ...input, flips: { kind: 'tossed', bits: tossBits(rounds ?? []) } })
    let step = walks.next()
    while (step.done !== true) step = walks.next()
    if (step.value.end === 'dry') {
      throw new StepFailure('too-few-bits', `${where}.tosses`, 'The walks need more fair bits than these rounds give.')
    }
    return step.value.flipsUsed
  }
}
