import type { getSiteState, OrganisationRow } from '#shared/schemas/api/administrator.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { DIGEST, HALL } from './fixtures.ts'

/** A site on which one job failed and all else is well. */
export function siteState(): ResponseOf<typeof getSiteState> {
  return {
    now: '2026-09-20T10:00:00Z',
    jobs: {
      counts: [
        { kind: 'settle', waiting: 4, running: 0, failed: 0 },
        { kind: 'mail', waiting: 0, running: 1, failed: 0 },
        { kind: 'archive', waiting: 0, running: 0, failed: 1 },
      ],
      failed: [
        {
          id: 'c2d6b7a2-52a4-4b0e-9b5a-7f6d5f0c3c23',
          kind: 'archive',
          draw: { slug: 'spring-fair-2026', title: 'Spring Fair Draw' },
          at: '2026-09-20T08:12:40Z',
          tries: 6,
          error: 'The object store answered 503: it asks for less at a time.',
        },
      ],
      workerSeenAt: '2026-09-20T09:59:56Z',
    },
    mail: {
      queued: 12,
      sent: 4310,
      failed: 0,
      lastFailures: [],
      reachable: true,
      detail: 'mail.evenpenny.example, port 465, with TLS',
    },
    beacon: {
      network: 'drand quicknet',
      relays: [
        { address: 'https://relay-one.example', ok: true, round: 24_881_003, milliseconds: 84, detail: 'answers' },
        { address: 'https://relay-two.example', ok: true, round: 24_881_003, milliseconds: 131, detail: 'answers' },
      ],
    },
    timestamps: {
      authorities: [
        { address: 'https://timestamps.example', ok: true, milliseconds: 210, detail: 'It gave a timestamp.' },
      ],
      waiting: 0,
    },
    witnesses: [
      {
        name: 'lantern.example',
        address: 'https://lantern.example',
        ok: true,
        size: 4210,
        detail: 'It cosigned the log at 4210 entries.',
      },
    ],
    store: {
      bucket: 'evenpenny-proofs',
      reachable: true,
      locked: true,
      detail: 'Answers within 40 ms',
      archives: 318,
      unverified: 1,
    },
    overdue: [],
    keyFingerprint: DIGEST,
    clockErrorSeconds: 0.2,
  }
}

export function organisationRow(changes: Partial<OrganisationRow> = {}): OrganisationRow {
  return {
    id: 'd3d6b7a2-52a4-4b0e-9b5a-7f6d5f0c3c24',
    ...HALL,
    registration: 'Charity 998041, England and Wales',
    address: 'Weir Lane, Otterford',
    about: 'Keeps the hall open for everybody in the valley.',
    timeZone: 'Europe/London',
    currency: 'GBP',
    state: 'approved',
    demo: false,
    people: 3,
    draws: { draft: 1, open: 1, drawn: 4 },
    createdAt: '2026-01-12T09:00:00Z',
    version: 6,
    ...changes,
  }
}
