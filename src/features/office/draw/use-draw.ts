import { useQuery } from '@tanstack/react-query'
import { useParams } from 'react-router'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { useApp } from '#src/lib/app-context.ts'
import { officeDrawQuery } from '../api/queries.ts'

/** The draw of this page. The layout above has read it, so it is there; throws otherwise. */
export function useDraw(): OfficeDraw {
  const { api } = useApp()
  const { data } = useQuery(officeDrawQuery(api, useParams().draw ?? ''))
  if (!data) throw new Error('the draw was not read before its page')
  return data
}
