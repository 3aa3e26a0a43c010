import { createHash } from 'node:crypto'

/** Invented people for demo lists: the same list every time for the same name and length. */

const FIRST = [
  'Abena',
  'Alasdair',
  'Beatrix',
  'Bogdan',
  'Callum',
  'Chidi',
  'Delphine',
  'Dilys',
  'Eamon',
  'Esi',
  'Farida',
  'Fergus',
  'Gudrun',
  'Hamza',
  'Hester',
  'Ileana',
  'Ivo',
  'Jocasta',
  'Kenji',
  'Lakshmi',
  'Leopold',
  'Maeve',
  'Mirela',
  'Nkechi',
  'Olwen',
  'Oscar',
  'Petra',
  'Quentin',
  'Rosamund',
  'Rui',
  'Saoirse',
  'Sanjay',
  'Tamsin',
  'Thorbjorn',
  'Una',
  'Viktor',
  'Winifred',
  'Xenia',
  'Yusuf',
  'Zofia',
] as const
const LAST = [
  'Abernathy',
  'Achterberg',
  'Balogun',
  'Birdsall',
  'Cavanagh',
  'Chowdhury',
  'Dragomir',
  'Duckett',
  'Eberhardt',
  'Farquhar',
  'Gallimore',
  'Goonetilleke',
  'Hathersage',
  'Ikeda',
  'Jellicoe',
  'Kowalczyk',
  'Lindqvist',
  'Mapperley',
  'Murchison',
  'Nwosu',
  'Oakeshott',
  'Pomfret',
  'Quaynor',
  'Rasmussen',
  'Saltonstall',
  'Szymanski',
  'Thistlewood',
  'Ueland',
  'Vaszary',
  'Wetherby',
  'Yeatman',
  'Zawadzki',
] as const

/** Whole numbers from 0 to `below` - 1, the same ones for the same words. */
function numbersFrom(words: string): (below: number) => number {
  let counter = 0
  return (below) => {
    const digest = createHash('sha256').update(`${words} ${counter++}`).digest()
    return digest.readUInt32BE(0) % below
  }
}

export interface DemoList {
  readonly seed: string
  readonly entrants: number
  /** Every so manieth entrant has an e-mail address; 0: none. */
  readonly emailEvery: number
  /** Whether the entrants hold numbers of stub books. */
  readonly numbered: boolean
}

/** A CSV file as an organiser would bring it. Most hold a few tickets, some hold many. */
export function demoCsv({ seed, entrants, emailEvery, numbered }: DemoList): string {
  const pick = numbersFrom(seed)
  const lines = ['name,tickets,email,phone,numbers,label']
  let next = 1
  for (let index = 0; index < entrants; index += 1) {
    const first = FIRST[pick(FIRST.length)] ?? ''
    const last = LAST[pick(LAST.length)] ?? ''
    const tickets = pick(10) < 7 ? 1 + pick(5) : pick(10) < 9 ? 5 * (1 + pick(4)) : 25 + pick(26)
    const email =
      emailEvery > 0 && index % emailEvery === 0 ? `${first}.${last}.${index}@people.example`.toLowerCase() : ''
    const phone = index % 3 === 1 ? `01632 960${String(pick(1000)).padStart(3, '0')}` : ''
    const numbers = numbered ? (tickets === 1 ? `${next}` : `${next}-${next + tickets - 1}`) : ''
    next += tickets
    lines.push(`${first} ${last},${tickets},${email},${phone},${numbers},`)
  }
  return `${lines.join('\n')}\n`
}
