/**
 * The kinds of job. Delays are in seconds and double from try to try. Each job is safe to run twice and locks the row of
 * what it does, since an expired job can still be running when it is started again.
 */
export const QUEUES = {
  /** Closes draws whose closing time has come. */
  close: { retryLimit: 20, retryDelay: 2, retryBackoff: true },
  /** Seals a long list. Not tried again: a promoter looks at why it was refused. */
  seal: { retryLimit: 2, retryDelay: 1, retryBackoff: false },
  /** Settles one draw from its beacon's round on. */
  settle: { retryLimit: 100, retryDelay: 2, retryBackoff: true },
  /** Puts one draw's proof into the object store. */
  archive: { retryLimit: 60, retryDelay: 2, retryBackoff: true },
  /** Writes the rows of a draw's mails: its seal, its result, a notice. */
  'prepare-mail': { retryLimit: 20, retryDelay: 2, retryBackoff: true },
  /** Sends the mails that are due. */
  'send-mail': { retryLimit: 20, retryDelay: 2, retryBackoff: true },
} as const satisfies Record<string, { retryLimit: number; retryDelay: number; retryBackoff: boolean }>

export type QueueName = keyof typeof QUEUES
