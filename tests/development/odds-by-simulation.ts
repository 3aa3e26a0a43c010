/**
 * A million draws by the product's own walk, to hold shared/odds against; prints tests/outside/odds_simulation.json.
 * Takes minutes: the test suite makes fewer and checks the recorded ones. Run:
 *   npx tsx tests/development/odds-by-simulation.ts > tests/outside/odds_simulation.json
 */
import { countPicked } from '#tests/support/simulated-draws.ts'

const draws = 1_000_000
const cases = [
  { tickets: [1, 1, 2, 3, 5, 8, 13, 21, 34, 55], rule: 'one-prize-each', picks: 4 },
  { tickets: [40, 3, 9, 1, 17, 6], rule: 'every-ticket', picks: 5 },
] as const

const runs = cases.map((input) => {
  const seed = `${input.rule} odds`
  return { ...input, draws, seed, picked: countPicked({ ...input, draws, seed }) }
})
console.log(JSON.stringify({ _source: 'tests/development/odds-by-simulation.ts', runs }, null, 1))
