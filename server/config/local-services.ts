/** The addresses of everything that the site talks to, and its own. */
export interface ServiceAddresses {
  readonly databaseUrl: string
  /** undefined: Amazon's own. */
  readonly objectStoreEndpoint: string | undefined
  readonly smtpUrl: string
  readonly beaconRelays: readonly string[]
  readonly timestampUrls: readonly string[]
  readonly origin: string
}

/**
 * Names the services that are not on this machine's loopback address. Demo accounts, whose passwords everybody knows,
 * and the development chain, whose secret everybody knows, are allowed only where this list is empty: then nothing
 * real can be reached, by them or by others.
 */
export function servicesNotLocal(addresses: ServiceAddresses): readonly string[] {
  const { databaseUrl, objectStoreEndpoint, smtpUrl, beaconRelays, timestampUrls, origin } = addresses
  return [
    ...(isLoopbackDatabase(databaseUrl) ? [] : ['the database (EVENPENNY_DATABASE_URL)']),
    ...(isLoopback(objectStoreEndpoint) ? [] : ['the object store (EVENPENNY_S3_ENDPOINT)']),
    ...(isLoopback(smtpUrl) ? [] : ['the mail server (EVENPENNY_SMTP_URL)']),
    ...(beaconRelays.length > 0 && beaconRelays.every(isLoopback) ? [] : ['a beacon relay (EVENPENNY_BEACON_RELAYS)']),
    ...(timestampUrls.length > 0 && timestampUrls.every(isLoopback)
      ? []
      : ['a timestamp authority (EVENPENNY_TIMESTAMP_URLS)']),
    ...(isLoopback(origin) ? [] : ["the site's own address (EVENPENNY_ORIGIN)"]),
  ]
}

/** Whether an address is on loopback by its very text: RFC 1122 section 3.2.1.3 (127/8), RFC 4291 section 2.5.3, RFC 6761 section 6.3. */
export function isLoopback(address: string | undefined): boolean {
  return address !== undefined && URL.canParse(address) && isLoopbackHost(new URL(address).hostname)
}

function isLoopbackHost(host: string): boolean {
  const bare = host.toLowerCase().replace(/^\[|\]$/g, '')
  const octets = /^127\.(\d{1,3})\.(\d{1,3})\.(\d{1,3})$/.exec(bare)
  return (
    bare === 'localhost' || bare === '::1' || (octets !== null && octets.slice(1).every((part) => Number(part) < 256))
  )
}

/** The database driver lets `host` and `hostaddr` in the query go before the host itself; every one must be loopback. */
function isLoopbackDatabase(url: string): boolean {
  if (!isLoopback(url)) return false
  const { searchParams } = new URL(url)
  return [...searchParams].every(([name, value]) => !/^host(addr)?$/i.test(name) || isLoopbackHost(value))
}
