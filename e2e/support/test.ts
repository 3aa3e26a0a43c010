import { test as base } from '@playwright/test'
import { stack } from './stack.ts'

/** Playwright's test with relative addresses meaning the running site. */
export const test = base.extend({
  baseURL: async ({}, use) => {
    await use(stack().site)
  },
})

export { expect } from '@playwright/test'
