import { QueryClientProvider, type QueryClient } from '@tanstack/react-query'
import type { ReactNode } from 'react'
import { AppContextReact, type AppContext } from '#src/lib/app-context.ts'

interface ProvidersProps {
  readonly app: AppContext
  readonly queryClient: QueryClient
  readonly children: ReactNode
}

export function Providers({ app, queryClient, children }: ProvidersProps) {
  return (
    <AppContextReact value={app}>
      <QueryClientProvider client={queryClient}>{children}</QueryClientProvider>
    </AppContextReact>
  )
}
