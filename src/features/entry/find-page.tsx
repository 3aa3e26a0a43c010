import { useState } from 'react'
import { useNavigate } from 'react-router'
import { openEntry, requestEntryLink } from '#shared/schemas/api/entry.ts'
import { Head } from '#src/lib/head.tsx'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextField } from '#src/ui/field.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Part, Title } from '#src/ui/page.tsx'

/** The ways to one's own entry: a slip's code, or the link once more by mail. */
export function Component() {
  return (
    <>
      <Head title="Open your own entry" description="With the code from your slip, or by the link in your mail." />
      <Title
        title="Open your own entry"
        lead="Your private page shows your entry, your receipt, and after the draw what happened to your tickets, coin by coin."
      >
        <noscript>
          <div className="mt-unit-2">
            <Notice title="These forms need JavaScript">
              <p>
                Without it, open the address on your slip and add a slash and your code behind it; or open the link in
                your mail.
              </p>
            </Notice>
          </div>
        </noscript>
      </Title>
      <CodePart />
      <LinkPart />
    </>
  )
}

function CodePart() {
  const navigate = useNavigate()
  const form = useSubmit(openEntry, ({ code }) => navigate(`/entry/${code}`))
  return (
    <Part title="With a slip">
      <form
        className="form narrow-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          form.submit({ body: { code: String(new FormData(event.currentTarget).get('code')) } })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        <TextField
          name="code"
          label="The code on your slip"
          hint="Four groups of four. Small letters and gaps do not matter; there is no 0, 1, I or O."
          autoComplete="off"
          autoCapitalize="characters"
          spellCheck={false}
          error={form.faultOf('code')}
        />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Open my entry
          </Button>
        </p>
      </form>
    </Part>
  )
}

function LinkPart() {
  const [asked, setAsked] = useState<string | null>(null)
  const form = useSubmit(requestEntryLink, (_, input) => setAsked(input.body?.email ?? ''))
  return (
    <Part title="By e-mail">
      {asked !== null ? (
        <Notice title="Look into your mail">
          <p role="status">
            If an entry has the address {asked}, its private link is on its way. If nothing comes, the organiser may
            have another address of yours: ask the promoter, who is named on the draw’s page.
          </p>
        </Notice>
      ) : (
        <form
          className="form narrow-form"
          method="post"
          noValidate
          onSubmit={(event) => {
            event.preventDefault()
            form.submit({ body: { email: String(new FormData(event.currentTarget).get('email')).trim() } })
          }}
        >
          {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
          <TextField
            name="email"
            type="email"
            label="The e-mail address that you gave"
            autoComplete="email"
            error={form.faultOf('email')}
          />
          <p className="buttons">
            <Button type="submit" busy={form.busy}>
              Send me my link again
            </Button>
          </p>
        </form>
      )}
    </Part>
  )
}
