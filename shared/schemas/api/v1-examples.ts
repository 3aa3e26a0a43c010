/**
 * Calls of the public API for its description: one invented draw, whose digests and paths are worked out by the rules of the
 * record, so that a reader can try them. Seed, key and randomness are any bytes.
 */
export const LIST_EXAMPLE = {
  items: [
    {
      slug: 'allotment-shed-draw',
      title: 'Allotment shed draw',
      goodCause: 'A new water butt',
      organisation: {
        slug: 'brook-lane-allotments',
        name: 'Brook Lane Allotments',
      },
      state: 'drawn',
      demo: false,
      timeZone: 'Europe/London',
      closesAt: '2026-04-30T18:00:00Z',
      drawAt: '2026-05-02T11:00:00Z',
      drawnAt: '2026-05-02T11:00:04Z',
      entrants: 5,
      tickets: 19,
      prizes: 1,
      page: 'https://draws.example/draws/allotment-shed-draw',
    },
  ],
  total: 1,
  page: 1,
  pageSize: 20,
} as const

export const DRAW_EXAMPLE = {
  slug: 'allotment-shed-draw',
  title: 'Allotment shed draw',
  goodCause: 'A new water butt',
  organisation: {
    slug: 'brook-lane-allotments',
    name: 'Brook Lane Allotments',
  },
  state: 'drawn',
  demo: false,
  timeZone: 'Europe/London',
  closesAt: '2026-04-30T18:00:00Z',
  drawAt: '2026-05-02T11:00:00Z',
  drawnAt: '2026-05-02T11:00:04Z',
  entrants: 5,
  tickets: 19,
  prizes: 1,
  page: 'https://draws.example/draws/allotment-shed-draw',
  promoter: {
    name: 'Wilma Achterberg',
    address: '4 Brook Lane',
  },
  licence: null,
  ticketPrice: {
    minor: 100,
    currency: 'GBP',
  },
  minimumAge: 16,
  rule: 'one-prize-each',
  reserves: 1,
  prizeList: [
    {
      id: 'p1',
      name: 'Garden shed',
      quantity: 1,
      donor: null,
    },
  ],
  terms: 'One ticket, one chance.',
  seal: 'b216d68bd2eb7add59ba70272a5515cebd0914498f966d3bbeb9a1b4e832fbb6',
  replacedSeals: [],
  result: 'f6a214f7a5fcda0c2cee9660b7fc29f5649e3c68aad48e20e950137c98913a68',
  history: [
    {
      index: 40,
      at: '2026-03-01T09:00:00Z',
      event: 'opened',
      digest: null,
      note: null,
    },
    {
      index: 57,
      at: '2026-04-30T18:04:11Z',
      event: 'sealed',
      digest: 'b216d68bd2eb7add59ba70272a5515cebd0914498f966d3bbeb9a1b4e832fbb6',
      note: null,
    },
    {
      index: 61,
      at: '2026-05-02T11:00:04Z',
      event: 'drawn',
      digest: 'f6a214f7a5fcda0c2cee9660b7fc29f5649e3c68aad48e20e950137c98913a68',
      note: null,
    },
  ],
  files: [
    'https://draws.example/draws/allotment-shed-draw/seal.json',
    'https://draws.example/draws/allotment-shed-draw/result.json',
  ],
} as const

export const SEAL_EXAMPLE = {
  digest: 'b216d68bd2eb7add59ba70272a5515cebd0914498f966d3bbeb9a1b4e832fbb6',
  signature:
    '78eefb8bc1416fcc88d91202e3ee076c7fe60d9421e4f5683282679d767749251f892515c13d933f8c4c5b188d1be5b6c3d7a020b8543ed501d65546b03fd20d',
  signed:
    '{"draw":"allotment-shed-draw","drawAt":"2026-05-02T11:00:00Z","entries":{"count":5,"root":"7158310a79183ebb1ad814c8961ebdb6220111f04f21257515b61f30d61ea3ba","tickets":19},"format":"evenpenny/1","key":"3b1660fbc5ac10cd27fc72874a72541f3a877df6956cbf6dc0cf32e01f5ee1b6","kind":"seal","organisation":{"name":"Brook Lane Allotments","registration":null},"prizes":[{"id":"p1","name":"Garden shed","quantity":1}],"reason":null,"reserves":1,"revealBy":null,"rule":"one-prize-each","sealedAt":"2026-04-30T18:04:11Z","sources":{"beacon":{"chain":"52db9ba70e0cc0f6eaf7803dd07447a1f5477735fd3f661792ba94600c84e971","genesisTime":1692803367,"period":3,"publicKey":"83cf0f2896adee7eb8b5f01fcad3912212c437e0073e911fb90022d3e760183c8c4b450b6a0a6c3ac6a5776a2d1064510d1fec758c921cc22b0e17e63aaf4bcb5ed66304de9cf809bd274ca73bab4af5a6e9c76a4bc09e76eae8991ef5ece45a","round":28305412,"scheme":"bls-unchained-g1-rfc9380"},"flips":"derived","seedCommit":"7e3b35a37ee667a548ffaade7c7aa0fc4fa73177cd46f341bae8ea75096f78d0","tosses":null},"supersedes":null,"terms":"51d2361f4faea3bc8f9facdbc7d99abb555596a2e51f7b25fd3b41c93587e616","title":"Allotment shed draw"}',
  draw: {
    slug: 'allotment-shed-draw',
    title: 'Allotment shed draw',
  },
  keyFingerprint: '3b1660fbc5ac10cd27fc72874a72541f3a877df6956cbf6dc0cf32e01f5ee1b6',
  sealedAt: '2026-04-30T18:04:11Z',
  drawAt: '2026-05-02T11:00:00Z',
  root: '7158310a79183ebb1ad814c8961ebdb6220111f04f21257515b61f30d61ea3ba',
  entrants: 5,
  tickets: 19,
  rule: 'one-prize-each',
  reserves: 1,
  prizes: [
    {
      id: 'p1',
      name: 'Garden shed',
      quantity: 1,
    },
  ],
  beacon: {
    network: 'quicknet',
    chain: '52db9ba70e0cc0f6eaf7803dd07447a1f5477735fd3f661792ba94600c84e971',
    round: 28305412,
    at: '2026-05-02T11:00:00Z',
  },
  seedCommit: '7e3b35a37ee667a548ffaade7c7aa0fc4fa73177cd46f341bae8ea75096f78d0',
  supersedes: null,
  reason: null,
  timestamp: {
    at: '2026-04-30T18:04:12Z',
    authority: 'Time authority of the county',
  },
} as const

export const INCLUSION_EXAMPLE = {
  entryCommit: '2dc77715e650e97faa2701256ab7747ea2cae6043b82b9c9b8cb472ff5f60cda',
  format: 'evenpenny/1',
  kind: 'inclusion',
  leaf: 2,
  path: [
    {
      hash: '1c4a75c930058f8e715f9d95cd1cb8ea9610a606736a0043dbfd5d1d5ca0772c',
      side: 'R',
      tickets: 2,
    },
    {
      hash: '12a520ccd64f7b4d41bf9ff9abf73ec4e8ded79ff7cfa5577e4c709652e298ac',
      side: 'L',
      tickets: 4,
    },
    {
      hash: '91553bfb4e5e46ecbf9d7539849ea35bde5b38aed4f4b3d998b0fd89f4b66d4e',
      side: 'R',
      tickets: 8,
    },
  ],
  seal: 'b216d68bd2eb7add59ba70272a5515cebd0914498f966d3bbeb9a1b4e832fbb6',
  tickets: 5,
} as const

export const RESULT_EXAMPLE = {
  digest: 'f6a214f7a5fcda0c2cee9660b7fc29f5649e3c68aad48e20e950137c98913a68',
  signature:
    '99adccb7865dde6ac45bf1325dd6aedee1e6bf622cb2ac2f1e7a0ec5a9911bc3ffe760f7a2060239092e8f921ede2ad6cfd4537a3c16c0011002cd31bed0d802',
  draw: {
    slug: 'allotment-shed-draw',
    title: 'Allotment shed draw',
  },
  seal: 'b216d68bd2eb7add59ba70272a5515cebd0914498f966d3bbeb9a1b4e832fbb6',
  drawnAt: '2026-05-02T11:00:04Z',
  drawKey: '2c70e12b7a0646f92279f427c7b38e7334d8e5389cff167a1dc30e73f826b683',
  seed: '19b25856e1c150ca834cffc8b59b23adbd0ec0389e58eb22b3b64768098d002b',
  beacon: {
    round: 28305412,
    signature: 'ca978112ca1bbdcafac231b39a23dc4da786eff8147c4e72b9807785afee48bb3e23e8160039594a33894f6564e1b134',
    randomness: '1c26c5668e69e892e29576c7d33da04e36d8a234dd4401ca769660d3f62111b3',
  },
  transcriptDigest: '54e6289e14c7b0e7ad9acc2dfc4c1e3d027d0eef7f5c4c3fe7c292761d0e06a6',
  picks: {
    items: [
      {
        pick: 0,
        award: {
          kind: 'prize',
          prize: 'p1',
          name: 'Garden shed',
          item: 1,
          of: 1,
        },
        leaf: 2,
        label: 'Noor V.',
        labelState: 'open',
        ticketsIn: 5,
        remaining: 19,
      },
      {
        pick: 1,
        award: {
          kind: 'reserve',
          reserve: 1,
        },
        leaf: 4,
        label: null,
        labelState: 'not-called',
        ticketsIn: 8,
        remaining: 14,
      },
    ],
    total: 2,
    page: 1,
    pageSize: 100,
  },
} as const

export const TRANSCRIPT_EXAMPLE = {
  items: [
    {
      pick: 0,
      leaf: 2,
      coins: [
        {
          left: 11,
          right: 8,
          flips: '0',
          side: 'H',
        },
        {
          left: 4,
          right: 7,
          flips: '1',
          side: 'T',
        },
        {
          left: 5,
          right: 2,
          flips: '0',
          side: 'H',
        },
      ],
    },
    {
      pick: 1,
      leaf: 4,
      coins: [
        {
          left: 6,
          right: 8,
          flips: '1',
          side: 'T',
        },
      ],
    },
  ],
  total: 2,
  page: 1,
  pageSize: 100,
} as const
