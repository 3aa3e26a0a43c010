import type { SealView } from '#shared/schemas/api/public.ts'

/** The commands that check a downloaded archive with nothing but Node. */
export function checkCommand(seal: Pick<SealView, 'keyFingerprint' | 'beacon' | 'timestamp'>): string {
  const development = seal.beacon?.network === 'development'
  const test = development ? ` --test-beacon${seal.timestamp ? ' --test-timestamps' : ''}` : ''
  return `unzip proof.zip -d proof\nnode proof/check.mjs${test} \\\n  --key ${seal.keyFingerprint} \\\n  proof.zip`
}
