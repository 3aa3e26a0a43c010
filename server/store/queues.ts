/**
 * The kinds of job. Delays between tries are in seconds. Each job is safe to run twice and locks the row of
 * what it does, since an expired job can still be running when it is started again.
 */
export const QUEUES = {
  /** Closes a draw whose closing time has come. */
  close: { retryLimit: 1000, retryDelay: 3, retryBackoff: false },
  /** Seals a long list. A refusal is not tried again: a promoter looks at it. */
  seal: { retryLimit: 2, retryDelay: 1, retryBackoff: false },
  /** Asks for the timestamp of a seal that was made, and lets it count. */
  timestamp: { retryLimit: 100_000, retryDelay: 3, retryBackoff: false },
  /** Settles one draw from its beacon's round on. */
  settle: { retryLimit: 100_000, retryDelay: 3, retryBackoff: false },
  /** Signs the site's log and puts its checkpoints into the object store. */
  checkpoint: { retryLimit: 2000, retryDelay: 3, retryBackoff: false },
  /** Sends the newest checkpoint of the log to outside witnesses. Those that do not answer are asked again by the sweep. */
  cosign: { retryLimit: 3, retryDelay: 3, retryBackoff: false },
  /** Puts one draw's proof into the object store. */
  archive: { retryLimit: 2000, retryDelay: 3, retryBackoff: false },
  /** Writes the rows of a draw's mails: private links, its seal, its result, a notice. */
  'prepare-mail': { retryLimit: 1000, retryDelay: 3, retryBackoff: false },
  /** Sends the mails that are due. */
  'send-mail': { retryLimit: 1000, retryDelay: 3, retryBackoff: false },
} as const satisfies Record<string, { retryLimit: number; retryDelay: number; retryBackoff: boolean }>

export type QueueName = keyof typeof QUEUES

/** What each kind of job is told. Ids only: a queue holds no personal data. */
export interface JobData {
  readonly close: { readonly draw: string }
  readonly seal: {
    readonly draw: string
    readonly actor: string
    readonly version: number
    readonly entrants: number
    readonly tickets: number
    /** Where it replaces the seal in force: the new draw time, and the public reason. */
    readonly postpone?: { readonly drawAt: string; readonly reason: string }
  }
  readonly timestamp: { readonly draw: string }
  readonly cosign: Record<string, never>
  readonly settle: { readonly draw: string }
  readonly archive: { readonly draw: string }
  readonly checkpoint: { readonly draw?: string }
  readonly 'prepare-mail': {
    readonly draw: string
    readonly about: 'entry' | 'seal' | 'result' | 'notice'
    readonly logIndex?: number
    /** For `entry`: only those whom this import brought in. */
    readonly import?: string
  }
  readonly 'send-mail': { readonly draw?: string }
}
