/** Calls of the log for the public description: an invented log whose hashes and signature are sound. */
export const LOG_EXAMPLE = {
  head: {
    origin: 'draws.example/log',
    size: 3,
    root: 'f942ed18f347b339c19ce2ea75082749aed5a72077512aab53bf600ec2b95d59',
    note: 'draws.example/log\n3\n+ULtGPNHsznBnOLqdQgnSa7VpyB3USqrU79gDsK5XVk=\n\n— draws.example/log 5fXVC4YZioWvK46t9Su45tkcUIisFS2RrQV1b/JVwi1f2l3upc3s+07sZ7ktM5QTbQpsUijDPGioONUQkhFPGBOykQI=\n',
    keyFingerprint: '9c96bf4faa9b4ce56f6ed705c814af7e8d15a611f7770313ea548e58634b3a15',
    publicKey: 'bc02b01e365342a03eabbec90b9506e1520fa8a508d383552a8369474b62c951',
  },
  entries: {
    size: 3,
    entries: [
      {
        index: 0,
        leaf: '{"at":"2026-04-01T08:00:00Z","digest":null,"draw":"allotment-shed-draw","event":"opened","format":"evenpenny/1","kind":"log","note":null,"organisation":"brook-lane-allotments","supersedes":null}',
        note: null,
      },
      {
        index: 1,
        leaf: '{"at":"2026-04-12T17:30:00Z","digest":null,"draw":"allotment-shed-draw","event":"postponed","format":"evenpenny/1","kind":"log","note":"0a10fa6fabcd367b3ed240dc06b4f06cb9c0637fbfb5ac4ee7b4c8dc0d2948b4","organisation":"brook-lane-allotments","supersedes":null}',
        note: {
          salt: 'bee8d0ef2a94eec8bf7fe260edd38155dd1d29ce920d37babdb10c0886618cc6',
          text: 'The water butt has not arrived yet.',
        },
      },
    ],
  },
  inclusion: {
    index: 1,
    leaf: '{"at":"2026-04-12T17:30:00Z","digest":null,"draw":"allotment-shed-draw","event":"postponed","format":"evenpenny/1","kind":"log","note":"0a10fa6fabcd367b3ed240dc06b4f06cb9c0637fbfb5ac4ee7b4c8dc0d2948b4","organisation":"brook-lane-allotments","supersedes":null}',
    path: [
      '262c036641ac7c52812aed48b32a37d7f89bc88fe58b7bca53628dabd205ad21',
      '2f5e28e391c4a84e9a87b50a8bd7bb28adbaf1e0884c36b2380710ecb330dd24',
    ],
    size: 3,
    root: 'f942ed18f347b339c19ce2ea75082749aed5a72077512aab53bf600ec2b95d59',
  },
  consistency: {
    first: 2,
    second: 3,
    firstRoot: 'a467cf86269eb16a7093a2bbb3d5d5c15b7ff7192b1d46c48a51bffc155d3447',
    secondRoot: 'f942ed18f347b339c19ce2ea75082749aed5a72077512aab53bf600ec2b95d59',
    path: ['2f5e28e391c4a84e9a87b50a8bd7bb28adbaf1e0884c36b2380710ecb330dd24'],
  },
} as const
