import { z } from 'zod'
import type { Endpoint } from '../endpoint.ts'
import { email, empty, hex32, line, role, slug, uuid } from '../values.ts'

/** bcrypt reads 72 bytes; longer passwords are refused rather than cut. */
export const password = z
  .string()
  .min(12, 'Use at least 12 characters. Three or four unrelated words make a good password.')
  .refine(
    (value) => value.length <= 72 && encodeURIComponent(value).replace(/%../g, 'x').length <= 72,
    'Use at most 72 characters.',
  )

export const sessionView = z.object({
  /** null: not signed in. */
  person: z
    .object({
      id: uuid,
      name: z.string(),
      email: z.string(),
      administrator: z.boolean(),
      memberships: z.array(
        z.object({ organisation: z.object({ slug, name: z.string(), state: z.string(), timeZone: z.string() }), role }),
      ),
    })
    .nullable(),
  site: z.object({
    origin: z.string(),
    local: z.boolean(),
    developmentChain: z.boolean(),
    keyFingerprint: hex32,
    mailPage: z.string().nullable(),
  }),
})
export type SessionView = z.infer<typeof sessionView>

const token = z.object({ token: z.string().regex(/^[A-Za-z0-9_-]{43}$/) })

export const getSession = {
  name: 'getSession',
  method: 'GET',
  path: '/api/session',
  summary: 'Who is signed in',
  params: empty,
  query: empty,
  body: empty,
  response: sessionView,
} as const satisfies Endpoint
export const signIn = {
  name: 'signIn',
  method: 'POST',
  path: '/api/session',
  summary: 'Sign in',
  params: empty,
  query: empty,
  body: z.object({
    email: z.string().min(1, 'Type your e-mail address.').max(254),
    password: z.string().min(1, 'Type your password.').max(1000),
  }),
  response: sessionView,
} as const satisfies Endpoint
export const signOut = {
  name: 'signOut',
  method: 'DELETE',
  path: '/api/session',
  summary: 'Sign out',
  params: empty,
  query: empty,
  body: empty,
  response: empty,
} as const satisfies Endpoint
export const changePassword = {
  name: 'changePassword',
  method: 'POST',
  path: '/api/account/password',
  summary: 'Change your password; other sessions end',
  params: empty,
  query: empty,
  body: z.object({ current: z.string().min(1, 'Type your present password.').max(1000), password }),
  response: empty,
} as const satisfies Endpoint
/** Always answers the same, whether or not the address is known. */
export const requestPasswordReset = {
  name: 'requestPasswordReset',
  method: 'POST',
  path: '/api/password-resets',
  summary: 'Ask for a link to set a new password',
  params: empty,
  query: empty,
  body: z.object({ email }),
  response: empty,
} as const satisfies Endpoint
export const getPasswordReset = {
  name: 'getPasswordReset',
  method: 'GET',
  path: '/api/password-resets/:token',
  summary: 'Whether a reset link still works',
  params: token,
  query: empty,
  body: empty,
  response: z.object({ email: z.string() }),
} as const satisfies Endpoint
export const resetPassword = {
  name: 'resetPassword',
  method: 'POST',
  path: '/api/password-resets/:token',
  summary: 'Set a new password; every session of that person ends',
  params: token,
  query: empty,
  body: z.object({ password }),
  response: empty,
} as const satisfies Endpoint
export const getInvitation = {
  name: 'getInvitation',
  method: 'GET',
  path: '/api/invitations/:token',
  summary: 'What an invitation is for',
  params: token,
  query: empty,
  body: empty,
  response: z.object({
    organisation: z.string(),
    role,
    email: z.string(),
    invitedBy: z.string(),
    knownPerson: z.boolean(),
  }),
} as const satisfies Endpoint
/** A person who already has an account gives its password instead of choosing one. */
export const acceptInvitation = {
  name: 'acceptInvitation',
  method: 'POST',
  path: '/api/invitations/:token',
  summary: 'Accept an invitation and sign in',
  params: token,
  query: empty,
  body: z.object({
    name: line(100, 'Type your name.').optional(),
    password: z.string().min(1, 'Type a password.').max(1000),
  }),
  response: sessionView,
} as const satisfies Endpoint
