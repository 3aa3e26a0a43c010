import { customType, timestamp } from 'drizzle-orm/pg-core'

/** Raw bytes. */
export const bytes = customType<{ data: Uint8Array; driverData: Buffer }>({
  dataType: () => 'bytea',
  toDriver: (value) => Buffer.from(value.buffer, value.byteOffset, value.byteLength),
  fromDriver: (value) => new Uint8Array(value.buffer, value.byteOffset, value.byteLength),
})

/** A set of whole numbers without a gap, as PostgreSQL writes it: `[101,151)`. */
export const numberRange = customType<{ data: string }>({ dataType: () => 'int8range' })

/** An instant: always with its time zone, and a Date in code. */
export const at = () => timestamp({ withTimezone: true, mode: 'date' })
