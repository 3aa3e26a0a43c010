import { email as emailSchema } from '#shared/schemas/values.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { makeAdministrator } from '#server/commands/people/make-administrator.ts'
import { loadConfig } from '#server/config/config.ts'
import { createServices } from '#server/services.ts'

const USAGE = `usage: npm run administrator -- ADDRESS "NAME"
Makes an administrator of the site and mails them a link to set their password.
Run it with the same environment as the site.`

const [address, name, ...rest] = process.argv.slice(2)
if (!address || !name || rest.length > 0 || !emailSchema.safeParse(address).success) {
  console.error(USAGE)
  process.exit(2)
}

const services = createServices(loadConfig(), { name: 'evenpenny administrator', connections: 1 })
try {
  await makeAdministrator(services, { email: address, name })
  console.log(`${name} is an administrator. The worker mails a link to ${address}; it works for an hour.`)
} catch (error) {
  if (!(error instanceof CommandError)) throw error
  console.error(error.message)
  process.exitCode = 1
} finally {
  await services.close()
}
