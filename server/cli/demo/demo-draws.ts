import type { SettableClock } from '#server/adapters/clock/clock.ts'
import { cancelDraw } from '#server/commands/draws/cancel-draw.ts'
import { failDraw } from '#server/commands/draws/fail-draw.ts'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import type { Services } from '#server/services.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import type { DemoOffice } from './demo-people.ts'
import { type DemoDraw, DemoSteps } from './demo-steps.ts'

const DAY = 24 * 3600 * 1000
const HOUR = 3600 * 1000
const MINUTE = 60 * 1000

const TERMS = (cause: string, price: string) =>
  `The draw supports ${cause}. A ticket costs ${price}; entrants must be 16 or older.
Every ticket has the same chance. Prizes are drawn in the order in which they are listed.
Winners are told by e-mail, letter or telephone, and have 28 days to claim. An unclaimed prize goes to the next reserve.
This is a demonstration: no ticket is sold and no prize is given.`

/**
 * Makes the demo draws that are missing: one in every state but concluded, days gone by through the clock. The one that a
 * newcomer sees happen is made last, so that its three minutes begin when the site does.
 */
export async function makeDemoDraws(
  services: Services,
  clock: SettableClock,
  [allotments, rowing]: readonly DemoOffice[],
  now: () => Date,
): Promise<void> {
  if (!allotments || !rowing) throw new Error('The demo organisations are missing.')
  const today = new Date(Math.floor(now().getTime() / MINUTE) * MINUTE)
  const at = (days: number, hours = 0) => new Date(today.getTime() + days * DAY + hours * HOUR)
  const garden = new DemoSteps(services, clock, allotments, 'GBP')
  const club = new DemoSteps(services, clock, rowing, 'EUR')
  const make = async (steps: DemoSteps, plan: DemoDraw, live: (id: string) => Promise<void>, begin: Date) => {
    if (await steps.exists(plan.slug)) return
    clock.set(begin)
    await live(await steps.draft(plan))
  }

  await make(
    garden,
    springPlants(at),
    async (id) => {
      await garden.open(id, springPlants(at).list)
      await garden.witness(id)
      clock.set(at(-32))
      await garden.close(id)
      clock.set(at(-31))
      await garden.seal(id)
      clock.advance(2 * HOUR)
      await garden.confirm(id, 'seal')
      await garden.settle(id)
      clock.advance(HOUR)
      await garden.confirm(id, 'result')
    },
    at(-60),
  )
  await make(
    club,
    regatta(at),
    async (id) => {
      await club.open(id, regatta(at).list)
      clock.set(at(-11))
      await club.close(id)
      clock.set(at(-10))
      await club.seal(id)
      await club.settle(id)
    },
    at(-50),
  )
  await make(
    club,
    harbourLights(at),
    async (id) => {
      await club.open(id, harbourLights(at).list)
      clock.set(at(-41))
      await club.close(id)
      await club.seal(id)
      clock.set(at(-32))
      await failDraw(services, { draw: id })
    },
    at(-70),
  )
  await make(
    club,
    boathouseRoof(at),
    async (id) => {
      await club.open(id, boathouseRoof(at).list)
      clock.set(at(-12))
      const { slug: _, title } = boathouseRoof(at)
      const reason = 'The roof was given to us, so the draw is not needed. Everybody gets their money back.'
      await cancelDraw(services, rowing.promoter, { draw: id, version: await club.version(id), reason, title })
    },
    at(-40),
  )
  await make(
    garden,
    midsummer(at),
    async (id) => {
      await garden.open(id, midsummer(at).list)
      await garden.witness(id)
      clock.set(at(-4))
      await garden.close(id)
      clock.set(at(-3))
      await garden.seal(id)
      clock.set(at(-2))
      await garden.confirm(id, 'seal')
    },
    at(-30),
  )
  await make(
    club,
    winterCrew(at),
    async (id) => {
      await club.open(id, winterCrew(at).list)
      clock.set(at(-9))
      await club.close(id)
      clock.set(at(-8))
      await club.seal(id)
      clock.set(at(-5))
      await postponeDraw(services, rowing.promoter, {
        draw: id,
        version: await club.version(id),
        reason: 'The hall is being repaired until the new date.',
        drawAt: localFromInstant(at(26, 1), rowing.timeZone),
      })
    },
    at(-35),
  )
  await make(
    garden,
    toolShed(at),
    async (id) => {
      await garden.open(id, toolShed(at).list)
      clock.set(at(0, -2))
      await garden.close(id)
    },
    at(-20),
  )
  await make(garden, seedLibrary(at), (id) => garden.open(id, seedLibrary(at).list), at(-6))
  await make(club, juniorOars(at), async () => undefined, at(-1))

  // Three minutes from now, to the whole minute: forms know no seconds.
  const soon = new Date(Math.ceil((now().getTime() + 150_000) / MINUTE) * MINUTE)
  await make(
    garden,
    teatime(soon),
    async (id) => {
      await garden.open(id, teatime(soon).list)
      await garden.close(id)
      clock.set(now())
      await garden.seal(id)
    },
    now(),
  )
}

type At = (days: number, hours?: number) => Date

const springPlants = (at: At): DemoDraw => ({
  slug: 'spring-plant-sale-draw',
  title: 'Spring plant sale draw',
  goodCause: 'Raised beds for people who cannot kneel',
  terms: TERMS('raised beds for people who cannot kneel', '£1'),
  prizes: [
    ['Cold frame', 1, 'Larkmoor Joinery'],
    ['Fruit tree of your choice', 3],
    ['Packet of seeds', 8],
  ],
  rule: 'every-ticket',
  reserves: 4,
  ticketPriceMinor: 100,
  closesAt: at(-31),
  drawAt: at(-30, 3),
  list: { seed: 'spring-plants', entrants: 74, emailEvery: 3, numbered: true },
})
const regatta = (at: At): DemoDraw => ({
  slug: 'regatta-grand-draw',
  title: 'Regatta grand draw',
  goodCause: 'Two new quads for the juniors',
  terms: TERMS('two new quads for the juniors', '€2'),
  prizes: [
    ['Weekend on the canal', 1, 'Quayside Boats'],
    ['Bicycle', 2],
    ['Dinner for two', 5],
    ['Club jersey', 20],
  ],
  rule: 'one-prize-each',
  reserves: 12,
  ticketPriceMinor: 200,
  closesAt: at(-11, 2),
  drawAt: at(-9),
  list: { seed: 'regatta', entrants: 5012, emailEvery: 250, numbered: true },
})
const harbourLights = (at: At): DemoDraw => ({
  slug: 'harbour-lights-draw',
  title: 'Harbour lights draw',
  goodCause: 'Lights on the slipway',
  terms: TERMS('lights on the slipway', '€1'),
  prizes: [
    ['Storm lantern', 1],
    ['Torch', 4],
  ],
  rule: 'one-prize-each',
  reserves: 2,
  ticketPriceMinor: 100,
  closesAt: at(-41, 2),
  drawAt: at(-40),
  list: { seed: 'harbour-lights', entrants: 31, emailEvery: 6, numbered: false },
})
const boathouseRoof = (at: At): DemoDraw => ({
  slug: 'boathouse-roof-draw',
  title: 'Boathouse roof draw',
  goodCause: 'A new roof for the boathouse',
  terms: TERMS('a new roof for the boathouse', '€5'),
  prizes: [['Day on the water for eight', 1]],
  rule: 'one-prize-each',
  reserves: 1,
  ticketPriceMinor: 500,
  closesAt: at(10),
  drawAt: at(11),
  list: { seed: 'boathouse-roof', entrants: 22, emailEvery: 5, numbered: false },
})
const midsummer = (at: At): DemoDraw => ({
  slug: 'lantern-walk-draw',
  title: 'Lantern walk draw',
  goodCause: 'A path that wheelchairs can use',
  terms: TERMS('a path that wheelchairs can use', '£1'),
  prizes: [
    ['Hamper from the plots', 1],
    ['Honey, six jars', 2, 'The Larkmoor hives'],
    ['Willow basket', 3],
  ],
  rule: 'one-prize-each',
  reserves: 5,
  ticketPriceMinor: 100,
  closesAt: at(-3),
  drawAt: at(20, 2),
  list: { seed: 'lantern-walk', entrants: 137, emailEvery: 4, numbered: true },
})
const winterCrew = (at: At): DemoDraw => ({
  slug: 'winter-crew-draw',
  title: 'Winter crew draw',
  goodCause: 'Warm clothes for the winter crews',
  terms: TERMS('warm clothes for the winter crews', '€2'),
  prizes: [
    ['Rowing machine', 1],
    ['Wool blanket', 4],
  ],
  rule: 'one-prize-each',
  reserves: 3,
  ticketPriceMinor: 200,
  closesAt: at(-8),
  drawAt: at(5),
  list: { seed: 'winter-crew', entrants: 88, emailEvery: 8, numbered: false },
})
const toolShed = (at: At): DemoDraw => ({
  slug: 'tool-shed-draw',
  title: 'Tool shed draw',
  goodCause: 'Tools that everybody may borrow',
  terms: TERMS('tools that everybody may borrow', '50p'),
  prizes: [
    ['Copper watering can', 1],
    ['Hand fork', 5],
  ],
  rule: 'one-prize-each',
  reserves: 2,
  ticketPriceMinor: 50,
  closesAt: at(1),
  drawAt: at(6),
  list: { seed: 'tool-shed', entrants: 53, emailEvery: 4, numbered: true },
})
const seedLibrary = (at: At): DemoDraw => ({
  slug: 'seed-library-draw',
  title: 'Seed library draw',
  goodCause: 'Drawers and jars for the seed library',
  terms: TERMS('drawers and jars for the seed library', '£1'),
  prizes: [
    ['Apothecary chest', 1],
    ['Seeds for a year', 6],
  ],
  rule: 'every-ticket',
  reserves: 3,
  ticketPriceMinor: 100,
  closesAt: at(12),
  drawAt: at(14),
  list: { seed: 'seed-library', entrants: 48, emailEvery: 4, numbered: true },
})
const juniorOars = (at: At): DemoDraw => ({
  slug: 'junior-oars-draw',
  title: 'Junior oars draw',
  goodCause: 'Short oars for small hands',
  terms: TERMS('short oars for small hands', '€1'),
  prizes: [['Rowing course', 2]],
  rule: 'one-prize-each',
  reserves: 2,
  ticketPriceMinor: 100,
  closesAt: at(40),
  drawAt: at(41),
  list: { seed: 'junior-oars', entrants: 0, emailEvery: 0, numbered: false },
})
const teatime = (drawAt: Date): DemoDraw => ({
  slug: 'teatime-draw',
  title: 'Teatime draw',
  goodCause: 'A new urn for the tea hut',
  terms: TERMS('a new urn for the tea hut', '50p'),
  prizes: [
    ['Cream tea for four', 1],
    ['Jar of plum jam', 4],
  ],
  rule: 'one-prize-each',
  reserves: 2,
  ticketPriceMinor: 50,
  closesAt: new Date(drawAt.getTime() - MINUTE),
  drawAt,
  list: { seed: 'teatime', entrants: 64, emailEvery: 4, numbered: true },
})
