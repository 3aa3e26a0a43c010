import { setTimeout as wait } from 'node:timers/promises'
import { acceptInvitation } from '#server/commands/people/accept-invitation.ts'
import { changePassword } from '#server/commands/people/change-password.ts'
import { requestPasswordReset } from '#server/commands/people/request-password-reset.ts'
import { resetPassword } from '#server/commands/people/reset-password.ts'
import { type CallContext, personOf } from '#server/http/endpoints/context.ts'
import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import type { HandlerParts } from '#server/http/handlers/parts.ts'
import { problem } from '#server/http/problems.ts'
import { findAccount, findSignedIn, getInvitation, getPasswordReset } from '#server/store/queries/people.ts'
import * as api from '#shared/schemas/api/session.ts'
import type { SessionView } from '#shared/schemas/api/session.ts'

/** Longer than the work for a known address takes, so that the wait tells nobody whether an address is known. */
const RESET_ANSWER_MS = 250

/** Signing in and out, passwords, invitations. */
export function sessionHandlers({ services, site, passwords, guard }: HandlerParts): Handled[] {
  const { db } = services
  const withPasswords = { ...services, passwords }

  const view = async (personId: string | null): Promise<SessionView> => {
    const person = personId === null ? null : await findSignedIn(db, personId)
    return {
      person: person ? { ...person, memberships: [...person.memberships] } : null,
      site: {
        origin: site.origin,
        local: site.local,
        developmentChain: services.site.developmentChain,
        keyFingerprint: services.signing.current.fingerprint,
        mailPage: site.mailPageUrl,
      },
    }
  }
  const signedIn = async (context: CallContext, personId: string) => {
    await context.session.start(personId)
    return view(personId)
  }
  /** A link that does not work counts as a try; one that does costs nothing. */
  const working = async <T>(context: CallContext, link: Promise<T | null>, sentence: string): Promise<T> => {
    const found = await link
    if (found !== null) return found
    await guard.beforeToken(context.address)
    throw problem(410, sentence, { code: 'expired' })
  }

  return [
    handle(api.getSession, (context) => view(context.actor.person?.id ?? null)),
    handle(api.signIn, async (context, { body }) => {
      await guard.beforeSignIn(context.address, body.email)
      const account = await findAccount(db, body.email)
      const right = await passwords.verify(body.password, account?.passwordHash ?? null)
      if (!account || !right) {
        const sentence = 'The e-mail address or the password is not right. Look at both and try again.'
        throw problem(401, sentence, {
          code: 'wrong-password',
          title: 'Not signed in',
          errors: [{ field: 'password', message: sentence }],
        })
      }
      await guard.afterSuccess(context.address, body.email)
      return signedIn(context, account.id)
    }),
    handle(api.signOut, async (context) => {
      await context.session.end()
      return {}
    }),
    handle(api.changePassword, async (context, { body }) => {
      const person = personOf(context)
      await guard.beforeSignIn(context.address, person.email)
      await changePassword(withPasswords, person, { ...body, session: context.session.id })
      await guard.afterSuccess(context.address, person.email)
      return {}
    }),
    handle(api.requestPasswordReset, async (context, { body }) => {
      await guard.beforeReset(context.address, body.email)
      await Promise.all([requestPasswordReset(services, body), wait(RESET_ANSWER_MS)])
      return {}
    }),
    handle(api.getPasswordReset, (context, { params }) =>
      working(
        context,
        getPasswordReset(services, params.token),
        'This link was used or is too old. Ask for a new one on the sign-in page.',
      ),
    ),
    handle(api.resetPassword, async (context, { params, body }) => {
      await guard.beforeToken(context.address)
      await resetPassword(withPasswords, { token: params.token, password: body.password })
      return {}
    }),
    handle(api.getInvitation, (context, { params }) =>
      working(
        context,
        getInvitation(services, params.token),
        'This invitation was used, taken back or is too old. Ask the person who sent it for a new one.',
      ),
    ),
    handle(api.acceptInvitation, async (context, { params, body }) => {
      await guard.beforeToken(context.address)
      const { personId } = await acceptInvitation(withPasswords, { token: params.token, ...body })
      return signedIn(context, personId)
    }),
  ]
}
