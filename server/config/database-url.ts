/** The database's address from the environment. Throws a sentence that names the variable. */
export function databaseUrl(env: NodeJS.ProcessEnv): string {
  const url = env.EVENPENNY_DATABASE_URL
  if (!url) throw new Error('Set EVENPENNY_DATABASE_URL to the address of the database, like postgres://user@host/name.')
  return url
}
