import { useQueryClient } from '@tanstack/react-query'
import { useNavigate } from 'react-router'
import { signOut } from '#shared/schemas/api/session.ts'
import { useSubmit } from './use-submit.ts'

/** Ends the session, forgets what was read with it, and goes to the sign-in page. */
export function useSignOut() {
  const queryClient = useQueryClient()
  const navigate = useNavigate()
  const leaving = useSubmit(signOut, async () => {
    queryClient.clear()
    await navigate('/sign-in?done=out')
  })
  return { busy: leaving.busy, signOut: () => leaving.submit({}) }
}
