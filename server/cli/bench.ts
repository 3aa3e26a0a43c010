import { cpus } from 'node:os'
import { parseArgs } from 'node:util'
import { browserSection } from '#server/cli/bench/browser-section.ts'
import { oddsSection } from '#server/cli/bench/odds-section.ts'
import { rehearsalSection } from '#server/cli/bench/rehearsal-section.ts'
import { type BenchSection, processorClock, wallClock } from '#server/cli/bench/report.ts'
import { serverSection } from '#server/cli/bench/server.ts'

const USAGE = `Usage: npm run bench -- [--sizes 10000,100000,1000000] [--processor-time] [SECTION …]`

const { values, positionals } = parseArgs({
  allowPositionals: true,
  options: { sizes: { type: 'string' }, 'processor-time': { type: 'boolean' } },
})
const sizes = (values.sizes ?? '10000,100000,1000000').split(',').map(Number)
const clock = values['processor-time'] ? processorClock : wallClock
const sections: readonly BenchSection[] = [
  rehearsalSection(sizes, clock),
  oddsSection(Math.max(...sizes), clock),
  browserSection(Math.max(...sizes)),
  serverSection,
]
const wanted = sections.filter(({ name }) => positionals.length === 0 || positionals.includes(name))

if (wanted.length === 0 || !sizes.every((size) => Number.isInteger(size) && size >= 100 && size <= 2_000_000)) {
  console.error(`${USAGE}\nSections: ${sections.map(({ name }) => name).join(', ')}. Sizes from 100 to 2000000.`)
  process.exitCode = 2
} else {
  const model = cpus()[0]?.model ?? 'an unknown processor'
  console.log(`Node ${process.version} on ${model}`)
  for (const section of wanted) {
    console.log(`\n${section.title}`)
    await section.run(console.log)
  }
}
