import { need } from '#shared/protocol/check/failure.ts'
import { type CheckStep, memberBytes } from '#shared/protocol/check/state.ts'
import { checkResultHead, parseResult } from '#shared/protocol/result.ts'

/** Step 5: the result: canonical, its members, its seal, times, `reveal` against `sources` (PROTOCOL section 8). */
export const checkResult: CheckStep = async (state) => {
  const result = need(parseResult(await memberBytes(state, 'result.json')), 'result.json')
  need(checkResultHead(result, state.seal, state.sealDigestHex), 'result.json')
  state.result = result
  return `The result of this seal, drawn at ${result.drawnAt}, with ${result.picks.length} picks.`
}
