/** Addresses of an organisation's office. */
export const drawsPath = (organisation: string) => `/office/${organisation}`
export const peoplePath = (organisation: string) => `/office/${organisation}/people`
export const newDrawPath = (organisation: string) => `/office/${organisation}/draws/new`

/** The steps of a draw's work, each a page. */
export type Step = '' | 'terms' | 'prizes' | 'entrants' | 'import' | 'seal' | 'history' | 'slips' | 'poster'

export const drawPath = (organisation: string, draw: string, step: Step = '') =>
  `/office/${organisation}/draws/${draw}${step ? `/${step}` : ''}`
