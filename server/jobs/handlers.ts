import { CommandError } from '#server/commands/command-error.ts'
import { closeDueDraw } from '#server/commands/draws/close-draw.ts'
import { completeSealing } from '#server/commands/draws/complete-sealing.ts'
import { failDraw, FAILED_AFTER_MS } from '#server/commands/draws/fail-draw.ts'
import { postponeLongList } from '#server/commands/draws/postpone-draw.ts'
import { sealLongList } from '#server/commands/draws/seal-draw.ts'
import type { Services } from '#server/services.ts'
import type { JobData, QueueName } from '#server/store/queues.ts'
import { dateOf } from '#server/time/instants.ts'
import { cosignCheckpoints } from './cosign-checkpoints.ts'
import type { AfterWrite } from './crash-points.ts'
import { prepareMail } from './mail/prepare-mail.ts'
import { sendMail } from './mail/send-mail.ts'
import { settleDraw } from './settle-draw.ts'
import { storeArchive } from './store-archive.ts'
import { storeCheckpoints } from './store-checkpoints.ts'

/** What came of a job: done, to be run again later, or given up for a reason that trying again does not mend. */
export type JobOutcome =
  | { readonly kind: 'done' }
  | { readonly kind: 'again'; readonly at: Date }
  | { readonly kind: 'given-up'; readonly reason: string }

export type Handlers = { readonly [Q in QueueName]: (data: JobData[Q]) => Promise<JobOutcome> }

const DONE: JobOutcome = { kind: 'done' }
/** While a round is awaited: every second at first, since it is due any moment, then more calmly. Milliseconds. */
const waitForRound = (waited: number): number => (waited < 60_000 ? 1000 : waited < 3_600_000 ? 5000 : 30_000)
/** While no authority gives a timestamp: soon again at first, then more calmly. Milliseconds. */
const waitForTimestamp = (tries: number): number => Math.min(2000 * 1.5 ** Math.min(tries, 20), 30_000)

/** What each kind of job does. Throwing makes the queue try the job again. */
export function jobHandlers(services: Services, afterWrite: AfterWrite): Handlers {
  const in_ = (milliseconds: number) => new Date(services.clock.now().getTime() + milliseconds)
  return {
    async close(data) {
      const outcome = await closeDueDraw(services, data)
      return outcome.kind === 'later' ? { kind: 'again', at: outcome.at } : DONE
    },
    async seal(data) {
      try {
        if (data.postpone) {
          await postponeLongList(services, { ...data, ...data.postpone, drawAt: dateOf(data.postpone.drawAt) })
        } else await sealLongList(services, data)
        return DONE
      } catch (error) {
        if (error instanceof CommandError) return { kind: 'given-up', reason: error.message }
        throw error
      }
    },
    async timestamp(data) {
      const outcome = await completeSealing(services, { draw: data.draw, afterWrite })
      if (outcome.kind === 'discarded') return { kind: 'given-up', reason: outcome.reason }
      if (outcome.kind === 'waiting') return { kind: 'again', at: in_(waitForTimestamp(outcome.tries)) }
      return DONE
    },
    async settle(data) {
      const outcome = await settleDraw(services, afterWrite, data)
      switch (outcome.kind) {
        case 'too-early':
          return { kind: 'again', at: outcome.at }
        case 'busy':
          return { kind: 'again', at: in_(2000) }
        case 'no-round': {
          const waited = services.clock.now().getTime() - outcome.roundAt.getTime()
          if (waited >= FAILED_AFTER_MS && (await failDraw(services, data))) return DONE
          return { kind: 'again', at: in_(waitForRound(waited)) }
        }
        default:
          return DONE
      }
    },
    async checkpoint() {
      await storeCheckpoints(services)
      return DONE
    },
    async cosign() {
      await cosignCheckpoints(services)
      return DONE
    },
    async archive(data) {
      await storeArchive(services, afterWrite, data)
      return DONE
    },
    async 'prepare-mail'(data) {
      await prepareMail(services, afterWrite, data)
      return DONE
    },
    async 'send-mail'() {
      const { nextAt } = await sendMail(services, afterWrite)
      if (nextAt === null) return DONE
      // Rows that another worker holds are due now: look again when it should be done.
      return { kind: 'again', at: new Date(Math.max(nextAt.getTime(), in_(2000).getTime())) }
    },
  }
}
