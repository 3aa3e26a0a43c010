import { CommandError } from '#server/commands/command-error.ts'
import { createAdministrator } from '#server/commands/people/create-administrator.ts'
import { ConfigError } from '#server/config/config-error.ts'
import { loadConfig } from '#server/config/config.ts'
import { createServices } from '#server/services.ts'
import { email as emailSchema } from '#shared/schemas/values.ts'

/** `npm run administrator -- ADDRESS NAME`: the way in for the first administrator of a new site. */
async function main(): Promise<number> {
  const [address = '', ...words] = process.argv.slice(2)
  const name = words.join(' ').trim()
  const email = emailSchema.safeParse(address)
  if (!email.success || name === '') {
    console.error('Give an e-mail address and a name: npm run administrator -- ana@group.example "Ana Example"')
    return 2
  }
  const services = createServices(loadConfig(), { name: 'evenpenny command', connections: 2 })
  try {
    const { link } = await createAdministrator(services, { email: email.data, name })
    console.log(`Open this link within 24 hours and choose a password. It works once:\n${link}`)
    return 0
  } finally {
    await services.close()
  }
}

main().then(
  (code) => {
    process.exitCode = code
  },
  (error: unknown) => {
    console.error(error instanceof ConfigError || error instanceof CommandError ? error.message : error)
    process.exitCode = 1
  },
)
