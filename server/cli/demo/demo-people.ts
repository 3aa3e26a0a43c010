import { and, eq } from 'drizzle-orm'
import { createPasswords, type Passwords } from '#server/adapters/passwords/passwords.ts'
import { type AccountMail, mailContext } from '#server/commands/account-mail.ts'
import { changeOrganisationState } from '#server/commands/organisations/change-organisation-state.ts'
import { createOrganisation } from '#server/commands/organisations/create-organisation.ts'
import { acceptInvitation } from '#server/commands/people/accept-invitation.ts'
import { createAdministrator } from '#server/commands/people/create-administrator.ts'
import { invitePerson } from '#server/commands/people/invite-person.ts'
import { resetPassword } from '#server/commands/people/reset-password.ts'
import type { Services } from '#server/services.ts'
import { mail, mailContent } from '#server/store/schema/operation.ts'
import { membership, organisation, person } from '#server/store/schema/people.ts'
import type { Role } from '#shared/schemas/values.ts'

export interface DemoSignIn {
  readonly role: Role | 'administrator'
  readonly name: string
  readonly email: string
  readonly password: string
  /** Name of the organisation; null for an administrator. */
  readonly organisation: string | null
}

export interface DemoOffice {
  readonly slug: string
  readonly name: string
  readonly address: string
  readonly timeZone: string
  readonly promoter: { readonly id: string; readonly name: string }
  readonly organiser: { readonly id: string; readonly name: string }
  readonly witness: { readonly id: string; readonly name: string }
}

// Everybody can read these passwords: the seed runs only where every service is a local fake.
const PASSWORD = 'lantern ferry copper quill'
const ADMINISTRATOR = { name: 'Sunniva Ashdown', email: 'administrator@evenpenny.example' }

interface OfficePlan {
  readonly slug: string
  readonly name: string
  readonly registration: string | null
  readonly address: string
  readonly about: string
  readonly timeZone: string
  readonly currency: string
  readonly people: Readonly<Record<Role, { readonly name: string; readonly email: string }>>
}

const OFFICES: readonly OfficePlan[] = [
  {
    slug: 'larkmoor-allotment-society',
    name: 'Larkmoor Allotment Society',
    registration: 'Registered charity 0000417 (invented)',
    address: 'The Potting Shed, Larkmoor Lane, Larkmoor',
    about: 'Sixty plots, one tool shed and a seed library, open to everybody in Larkmoor.',
    timeZone: 'Europe/London',
    currency: 'GBP',
    people: {
      promoter: { name: 'Wilf Tarrant', email: 'wilf@larkmoor.example' },
      organiser: { name: 'Ottilie Grange', email: 'ottilie@larkmoor.example' },
      witness: { name: 'Canon Peverel Munt', email: 'munt@larkmoor.example' },
    },
  },
  {
    slug: 'ferry-steps-rowing-club',
    name: 'Ferry Steps Rowing Club',
    registration: null,
    address: 'The Boathouse, Ferry Steps, Ballinmore Quay',
    about: 'Rowing for young people who never sat in a boat before.',
    timeZone: 'Europe/Dublin',
    currency: 'EUR',
    people: {
      promoter: { name: 'Nuala Corrigan', email: 'nuala@ferrysteps.example' },
      organiser: { name: 'Piet Vanderlinde', email: 'piet@ferrysteps.example' },
      witness: { name: 'Agnes Thorley', email: 'agnes@ferrysteps.example' },
    },
  },
]

/** The demo accounts, for the file that npm start shows. */
export const DEMO_SIGN_INS: readonly DemoSignIn[] = [
  { role: 'administrator', ...ADMINISTRATOR, password: PASSWORD, organisation: null },
  ...OFFICES.flatMap((office) =>
    (['promoter', 'organiser', 'witness'] as const).map((role) => ({
      role,
      ...office.people[role],
      password: PASSWORD,
      organisation: office.name,
    })),
  ),
]

/** Makes the accounts and organisations that are missing, by the same commands as the site. */
export async function makeDemoPeople(services: Services): Promise<readonly DemoOffice[]> {
  const passwords = createPasswords()
  try {
    const administrator = await demoAdministrator({ ...services, passwords })
    const offices: DemoOffice[] = []
    for (const plan of OFFICES) offices.push(await demoOffice({ ...services, passwords }, administrator, plan))
    return offices
  } finally {
    await passwords.close()
  }
}

type WithPasswords = Services & { readonly passwords: Passwords }
type Someone = { readonly id: string; readonly name: string }

async function demoAdministrator(services: WithPasswords): Promise<Someone> {
  const [known] = await services.db.select().from(person).where(eq(person.email, ADMINISTRATOR.email))
  if (known?.passwordHash) return known
  if (known)
    throw new Error(`The demo data is half made: ${ADMINISTRATOR.email} has no password. Start with a new data folder.`)
  const { id, token } = await createAdministrator(services, { ...ADMINISTRATOR, demo: true })
  await resetPassword(services, { token, password: PASSWORD })
  return { id, name: ADMINISTRATOR.name }
}

async function demoOffice(services: WithPasswords, administrator: Someone, plan: OfficePlan): Promise<DemoOffice> {
  const { slug, people, ...values } = plan
  const find = async () => (await services.db.select().from(organisation).where(eq(organisation.slug, slug)))[0]
  if (!(await find())) {
    await createOrganisation(services, administrator, { ...values, promoterEmail: people.promoter.email, demo: true })
  }
  const owner = await find()
  if (!owner) throw new Error(`The demo organisation ${slug} was not made.`)
  if (owner.state === 'pending') {
    const { version } = owner
    await changeOrganisationState(services, administrator, {
      organisation: slug,
      version,
      state: 'approved',
      reason: null,
    })
  }
  const member = (role: Role) => demoMember(services, administrator, owner.id, slug, role, people[role])
  return {
    slug,
    name: owner.name,
    address: owner.address,
    timeZone: owner.timeZone,
    promoter: await member('promoter'),
    organiser: await member('organiser'),
    witness: await member('witness'),
  }
}

async function demoMember(
  services: WithPasswords,
  administrator: Someone,
  organisationId: string,
  slug: string,
  role: Role,
  who: { readonly name: string; readonly email: string },
): Promise<Someone> {
  const [known] = await services.db
    .select({ id: person.id, name: person.name })
    .from(person)
    .innerJoin(membership, eq(membership.personId, person.id))
    .where(and(eq(person.email, who.email), eq(membership.organisationId, organisationId)))
  if (known) return known
  const { id: invitation } = await invitePerson(services, administrator, { organisation: slug, email: who.email, role })
  const { personId } = await acceptInvitation(services, {
    token: await tokenOf(services, `invitation:${invitation}`),
    name: who.name,
    password: PASSWORD,
  })
  return { id: personId, name: who.name }
}

/** The secret of an invitation's link, out of the mail that waits; the mail is dropped, since the link is used here. */
async function tokenOf(services: Services, key: string): Promise<string> {
  const [row] = await services.db
    .select({ id: mail.id, payload: mailContent.payload })
    .from(mail)
    .innerJoin(mailContent, eq(mailContent.mailId, mail.id))
    .where(eq(mail.key, key))
  if (!row) throw new Error('A demo invitation has no mail.')
  const content = JSON.parse(
    Buffer.from(services.secrets.open(row.payload, mailContext(key))).toString(),
  ) as AccountMail
  await services.db.update(mail).set({ state: 'dropped' }).where(eq(mail.id, row.id))
  return content.link.split('/').at(-1) ?? ''
}
