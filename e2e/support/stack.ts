/** Where the product under test is to be found; the fields of what server/setup/browser-stack.mjs prints. */
export interface StackAddresses {
  readonly site: string
  readonly mailPage: string
  readonly beacon: string
  readonly timestamp: string
  readonly s3: string
  readonly smtp: string
  /** For looking at what a page cannot show; specs change nothing through it. */
  readonly databaseUrl: string
  readonly data: string
  readonly signIns: readonly DemoSignIn[]
}

/** A demo account, as the seed writes it. */
export interface DemoSignIn {
  readonly role: string
  readonly name: string
  readonly email: string
  readonly password: string
  readonly organisation: string | null
}

/** The variable through which the global set-up hands the addresses to the workers. */
export const STACK_VARIABLE = 'EVENPENNY_E2E_STACK'

/** The running stack. Throws when the global set-up has not run. */
export function stack(): StackAddresses {
  const text = process.env[STACK_VARIABLE]
  if (!text) throw new Error(`${STACK_VARIABLE} is not set: run the specs through "npm run e2e" or "npm test".`)
  return JSON.parse(text) as StackAddresses
}

/** The first demo account with a role, for example "promoter". */
export function signInOf(role: string): DemoSignIn {
  const found = stack().signIns.find((each) => each.role === role)
  if (!found) throw new Error(`No demo account has the role ${role}.`)
  return found
}
