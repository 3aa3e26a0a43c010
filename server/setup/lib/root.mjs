// @ts-check
import { fileURLToPath } from 'node:url'
import { resolve } from 'node:path'

/** The checkout that this file belongs to. */
export const ROOT = resolve(fileURLToPath(new URL('.', import.meta.url)), '../../..')
