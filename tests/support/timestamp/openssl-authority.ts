import { execFileSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { der, derInteger, TAG } from '#shared/timestamp/der.ts'

/**
 * A throw-away timestamp authority that OpenSSL runs: a root, an authority below it, and a signer below that, so that
 * tokens and certificates come from another hand than ours.
 */
export interface OpensslAuthority {
  readonly folder: string
  /** PEM of the root alone. */
  readonly root: string
  readonly signer: string
  /** A TimeStampResp over some bytes, with all certificates but the root. */
  reply(data: Uint8Array, options?: { readonly certificates?: boolean }): Uint8Array
  /** A TimeStampResp to a request of ours. */
  answer(request: Uint8Array): Uint8Array
  /**
   * Signs a TSTInfo as CMS, whatever the certificate is for, which `ts -reply` would not do; `named: false` leaves out the
   * attribute that names the certificate.
   */
  signAnyway(info: Uint8Array, options?: { readonly named?: boolean }): Uint8Array
  close(): void
}

export type AuthorityKey = 'rsa' | 'p256' | 'p384'

const KEYS: Readonly<Record<AuthorityKey, readonly string[]>> = {
  rsa: ['-algorithm', 'RSA', '-pkeyopt', 'rsa_keygen_bits:2048'],
  p256: ['-algorithm', 'EC', '-pkeyopt', 'ec_paramgen_curve:P-256'],
  p384: ['-algorithm', 'EC', '-pkeyopt', 'ec_paramgen_curve:P-384'],
}

const CONFIG = `
[req]
distinguished_name = dn
prompt = no
[dn]
CN = throw-away
[root]
basicConstraints = critical,CA:TRUE
keyUsage = critical,keyCertSign
subjectKeyIdentifier = hash
[middle]
basicConstraints = critical,CA:TRUE,pathlen:0
keyUsage = critical,keyCertSign
[signer]
basicConstraints = critical,CA:FALSE
keyUsage = critical,digitalSignature
extendedKeyUsage = critical,timeStamping
subjectKeyIdentifier = hash
[not-critical]
extendedKeyUsage = timeStamping
[two-purposes]
extendedKeyUsage = critical,timeStamping,codeSigning
[not-for-signatures]
keyUsage = critical,keyEncipherment
extendedKeyUsage = critical,timeStamping
[tsa]
default_tsa = it
[it]
serial = serial
signer_cert = signer.pem
signer_key = signer.key
certs = middle.pem
default_policy = 1.2.3.4.1
digests = sha256, sha384, sha512
accuracy = secs:1, millisecs:500, microsecs:100
ordering = yes
ess_cert_id_chain = no
`

export function openssl(args: readonly string[], cwd: string): string {
  return execFileSync('openssl', args, { cwd, encoding: 'utf8', stdio: ['ignore', 'pipe', 'pipe'] })
}

export interface AuthorityOptions {
  readonly digest?: 'sha256' | 'sha384' | 'sha512'
  /** The section of the configuration above that the signer's certificate is made by. */
  readonly extensions?: 'signer' | 'not-critical' | 'two-purposes' | 'not-for-signatures'
  /** By which digest the signed attributes name the certificate. SHA-1 is the older attribute's only one. */
  readonly named?: 'sha1' | 'sha256'
  /** `middle` signs without the right to: it is no authority. */
  readonly middle?: 'middle' | 'signer'
}

export function makeOpensslAuthority(key: AuthorityKey, options: AuthorityOptions = {}): OpensslAuthority {
  const { digest = 'sha256', extensions = 'signer', named = 'sha256', middle = 'middle' } = options
  const folder = mkdtempSync(join(tmpdir(), 'evenpenny-tsa-'))
  const run = (...args: string[]) => openssl(args, folder)
  writeFileSync(join(folder, 'c.cnf'), `${CONFIG}ess_cert_id_alg = ${named}\nsigner_digest = ${digest}\n`)
  writeFileSync(join(folder, 'serial'), '01\n')
  for (const name of ['root', 'middle', 'signer']) run('genpkey', ...KEYS[key], '-out', `${name}.key`)
  const subject = (name: string) => ['-subj', `/O=Throw-away tests/CN=Throw-away ${name}`]
  const issue = (name: string, section: string, issuer: string) => {
    run('req', '-new', '-config', 'c.cnf', '-key', `${name}.key`, ...subject(name), '-out', `${name}.csr`)
    const by = ['-CA', `${issuer}.pem`, '-CAkey', `${issuer}.key`, '-CAcreateserial', '-days', '30', `-${digest}`]
    run('x509', '-req', '-in', `${name}.csr`, ...by, '-extfile', 'c.cnf', '-extensions', section, '-out', `${name}.pem`)
  }
  const self = ['-key', 'root.key', ...subject('root'), `-${digest}`, '-days', '30', '-out', 'root.pem']
  run('req', '-x509', '-new', '-config', 'c.cnf', '-extensions', 'root', ...self)
  issue('middle', middle, 'root')
  issue('signer', extensions, 'middle')
  const answer = (request: Uint8Array): Uint8Array => {
    writeFileSync(join(folder, 'q.tsq'), request)
    run('ts', '-reply', '-config', 'c.cnf', '-section', 'it', '-queryfile', 'q.tsq', '-out', 'r.tsr')
    return new Uint8Array(readFileSync(join(folder, 'r.tsr')))
  }
  return {
    folder,
    root: readFileSync(join(folder, 'root.pem'), 'utf8'),
    signer: readFileSync(join(folder, 'signer.pem'), 'utf8'),
    answer,
    reply(data, { certificates = true } = {}) {
      writeFileSync(join(folder, 'data'), data)
      run('ts', '-query', '-data', 'data', '-sha256', ...(certificates ? ['-cert'] : []), '-out', 'q2.tsq')
      return answer(readFileSync(join(folder, 'q2.tsq')))
    },
    signAnyway(info, { named: naming = true } = {}) {
      writeFileSync(join(folder, 'info'), info)
      const content = ['-binary', '-nodetach', '-econtent_type', '1.2.840.113549.1.9.16.1.4', '-nosmimecap']
      if (naming) content.push('-cades')
      const signer = ['-signer', 'signer.pem', '-inkey', 'signer.key', '-certfile', 'middle.pem', '-md', 'sha256']
      run('cms', '-sign', '-in', 'info', ...content, ...signer, '-outform', 'DER', '-out', 'token')
      const granted = der(TAG.sequence, derInteger(Uint8Array.of(0)))
      return der(TAG.sequence, granted, new Uint8Array(readFileSync(join(folder, 'token'))))
    },
    close: () => rmSync(folder, { recursive: true, force: true }),
  }
}

/** What `openssl ts -verify` says of a response over some bytes: its exit status decides. */
export function opensslVerifies(data: Uint8Array, response: Uint8Array, trustedPem: string): boolean {
  const folder = mkdtempSync(join(tmpdir(), 'evenpenny-tsv-'))
  try {
    writeFileSync(join(folder, 'data'), data)
    writeFileSync(join(folder, 'r.tsr'), response)
    writeFileSync(join(folder, 'ca.pem'), trustedPem)
    const said = openssl(['ts', '-verify', '-data', 'data', '-in', 'r.tsr', '-CAfile', 'ca.pem'], folder)
    return said.includes('Verification: OK')
  } catch {
    return false
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}
