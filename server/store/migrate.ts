import { migrateDatabase } from './migrate-database.ts'
import { databaseUrl } from '#server/config/database-url.ts'

await migrateDatabase(databaseUrl(process.env))
console.log('The database is up to date.')
