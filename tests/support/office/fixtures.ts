import type { EntrantRow, ImportView, OfficeDraw, listEntrants, listPeople } from '#shared/schemas/api/office.ts'
import type { SessionView } from '#shared/schemas/api/session.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Role } from '#shared/schemas/values.ts'

/** Invented people and draws for the tests of the signed-in pages. */
export const DRAW_ID = '3f0e7f6e-4f0a-4a1c-9d55-0c1f5a0b7a11'
export const ME = '6f6f3f58-9f0d-4c58-8a57-3a2f1b7d9e01'
export const OTHER = '6f6f3f58-9f0d-4c58-8a57-3a2f1b7d9e02'
export const IMPORT_ID = 'b6d6b7a2-52a4-4b0e-9b5a-7f6d5f0c3c21'
export const HALL = { slug: 'otterford-hall', name: 'Otterford Village Hall' } as const
export const OFFICE = `/office/${HALL.slug}`
export const DRAW = `${OFFICE}/draws/${DRAW_ID}`
export const DIGEST = '5c'.repeat(32)

export function session(role: Role | 'administrator' | null = 'promoter', state = 'approved'): SessionView {
  return {
    person:
      role === null
        ? null
        : {
            id: ME,
            name: 'Hester Vane',
            email: 'hester@otterford.example',
            administrator: role === 'administrator',
            memberships:
              role === 'administrator' ? [] : [{ organisation: { ...HALL, state, timeZone: 'Europe/London' }, role }],
          },
    site: {
      origin: 'https://evenpenny.example',
      local: false,
      developmentChain: false,
      keyFingerprint: DIGEST,
      mailPage: null,
    },
  }
}

const NOTHING = { queued: 0, sent: 0, failed: 0 }

export function officeDraw(changes: Partial<OfficeDraw> = {}): OfficeDraw {
  const state = changes.state ?? 'open'
  return {
    id: DRAW_ID,
    version: 4,
    slug: 'harvest-supper-2026',
    slugFixed: true,
    title: 'Harvest Supper Draw',
    goodCause: 'A ramp and a wider door for the hall',
    promoterName: 'Hester Vane',
    promoterAddress: '2 Weir Lane, Otterford',
    licence: 'Small society register 0417',
    ticketPrice: { minor: 150, currency: 'GBP' },
    minimumAge: 16,
    terms: 'Tickets at £1.50 from the committee. Prizes are kept for six weeks.',
    closesAt: '2026-10-02T17:00:00Z',
    drawAt: '2026-10-03T19:00:00Z',
    closesAtLocal: '2026-10-02T18:00',
    drawAtLocal: '2026-10-03T20:00',
    timeZone: 'Europe/London',
    rule: 'one-prize-each',
    reserves: 3,
    state,
    demo: false,
    now: '2026-09-20T10:00:00Z',
    organisation: { ...HALL, state: 'approved', currency: 'GBP' },
    prizes: [
      {
        id: 'p1',
        name: 'A weekend on a narrowboat',
        quantity: 1,
        donor: 'Lock Cottage Boats',
        description: null,
        value: { minor: 42_000, currency: 'GBP' },
      },
      { id: 'p2', name: 'A hamper of jams', quantity: 4, donor: null, description: null, value: null },
    ],
    counts: { entrants: 3, tickets: 19, withEmail: 2 },
    openedAt: state === 'draft' ? null : '2026-09-01T08:00:00Z',
    closedAt: null,
    sealedAt: null,
    drawnAt: null,
    sealDigest: null,
    sealing: null,
    resultDigest: null,
    beaconRoundAt: null,
    witnesses: [],
    statements: [],
    may: {
      edit: state === 'draft',
      changeEntrants: state === 'open',
      open: state === 'draft',
      close: state === 'open',
      reopen: state === 'closed',
      seal: state === 'closed',
      replaceSeal: false,
      postpone: state === 'open' || state === 'closed',
      cancel: true,
      state: false,
    },
    problems: { open: [], seal: [] },
    mail: { entry: NOTHING, seal: NOTHING, result: NOTHING, notice: NOTHING },
    jobs: [],
    archive: null,
    ...changes,
  }
}

export function entrant(id: number, changes: Partial<EntrantRow> = {}): EntrantRow {
  return {
    id: String(id),
    code: `K7M2P9XR0${id}`,
    name: ['Lowenna Trask', 'Amadou Keita', 'Birgit Solberg'][(id - 1) % 3] as string,
    label: ['Lowenna T.', 'Amadou K.', 'Birgit, Weir Lane'][(id - 1) % 3] as string,
    tickets: [4, 10, 5][(id - 1) % 3] as number,
    email: id % 3 === 2 ? null : `entrant${id}@otterford.example`,
    phone: id % 3 === 2 ? '01632 960177' : null,
    numbers: null,
    source: 'import',
    addedAt: '2026-09-10T09:30:00Z',
    announced: 'label',
    version: 1,
    ...changes,
  }
}

export function entrantList(
  items: readonly EntrantRow[] = [entrant(1), entrant(2), entrant(3)],
  changes: Partial<ResponseOf<typeof listEntrants>> = {},
): ResponseOf<typeof listEntrants> {
  return {
    items: [...items],
    total: items.length,
    tickets: items.reduce((sum, row) => sum + row.tickets, 0),
    page: 1,
    pageSize: 50,
    ...changes,
  }
}

export function importView(changes: Partial<ImportView> = {}): ImportView {
  return {
    id: IMPORT_ID,
    fileName: 'stub books 1-6.csv',
    state: 'ready',
    bytesRead: 4200,
    bytesTotal: 4200,
    rows: 2,
    entrants: 2,
    tickets: 13,
    errorCount: 0,
    errors: [],
    ignoredColumns: [],
    preview: [
      {
        row: 2,
        name: 'Piran Nance',
        tickets: 6,
        label: 'Piran N.',
        email: 'piran@otterford.example',
        phone: null,
        numbers: '0201-0206',
      },
      { row: 3, name: 'Ines Duarte', tickets: 7, label: 'Ines D.', email: null, phone: '01632 960188', numbers: null },
    ],
    failure: null,
    createdAt: '2026-09-19T14:05:00Z',
    createdBy: 'Hester Vane',
    ...changes,
  }
}

export function people(change = true): ResponseOf<typeof listPeople> {
  return {
    organisation: HALL,
    people: [
      {
        id: ME,
        name: 'Hester Vane',
        email: 'hester@otterford.example',
        role: 'promoter',
        since: '2026-02-01T09:00:00Z',
      },
      {
        id: OTHER,
        name: 'Tomos Ruddle',
        email: 'tomos@otterford.example',
        role: 'organiser',
        since: '2026-03-01T09:00:00Z',
      },
    ],
    invitations: [
      {
        id: 'a1d6b7a2-52a4-4b0e-9b5a-7f6d5f0c3c22',
        email: 'ivy@otterford.example',
        role: 'witness',
        invitedBy: 'Hester Vane',
        sentAt: '2026-09-18T09:00:00Z',
        expiresAt: '2026-09-25T09:00:00Z',
      },
    ],
    may: { change },
  }
}
