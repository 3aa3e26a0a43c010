import { useQueryClient } from '@tanstack/react-query'
import { redirect, useLoaderData, useNavigate, useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { signIn } from '#shared/schemas/api/session.ts'
import { load } from '#src/lib/loading.ts'
import { homeOf, safeNext, sessionQuery } from '#src/lib/session.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextField } from '#src/ui/field.tsx'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { AccountSheet } from './account-sheet.tsx'

export async function loader(args: LoaderFunctionArgs) {
  const session = await load(args, sessionQuery)
  const next = safeNext(new URL(args.request.url).searchParams.get('next'))
  if (session.person) throw redirect(next ?? homeOf(session.person))
  return { mailPage: session.site.mailPage }
}

const DONE: Record<string, string> = {
  password: 'Your new password is set. Sign in with it.',
  out: 'You are signed out.',
}

export function Component() {
  const { mailPage } = useLoaderData<typeof loader>()
  const [params] = useSearchParams()
  const navigate = useNavigate()
  const queryClient = useQueryClient()
  const form = useSubmit(signIn, async (session) => {
    queryClient.clear()
    queryClient.setQueryData(['session'], session)
    const next = safeNext(params.get('next'))
    await navigate(next ?? (session.person ? homeOf(session.person) : '/'))
  })
  const done = DONE[params.get('done') ?? '']
  return (
    <AccountSheet
      title="Sign in"
      description="For promoters, organisers, witnesses and administrators."
      lead="For the people who run a draw, witness one, or look after this site."
      failed={form.failed}
    >
      <form
        className="form narrow-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          const data = new FormData(event.currentTarget)
          form.submit({ body: { email: String(data.get('email')).trim(), password: String(data.get('password')) } })
        }}
      >
        {form.failed ? (
          <ErrorSummary title="You are not signed in" detail={form.detail} errors={form.faults} />
        ) : done ? (
          <Notice>
            <p role="status">{done}</p>
          </Notice>
        ) : null}
        <TextField
          name="email"
          type="email"
          label="E-mail address"
          autoComplete="username"
          error={form.faultOf('email')}
        />
        <TextField
          name="password"
          type="password"
          label="Password"
          autoComplete="current-password"
          error={form.faultOf('password')}
        />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            {form.busy ? 'Signing in' : 'Sign in'}
          </Button>
          <Link to="/password-resets">I have forgotten my password</Link>
        </p>
        {mailPage ? (
          <p className="note">
            This site runs on one machine with local fakes.{' '}
            <Link to={mailPage} plain>
              Its mails are read here
            </Link>
            ; the demo sign-ins were printed when it started.
          </p>
        ) : null}
      </form>
    </AccountSheet>
  )
}
