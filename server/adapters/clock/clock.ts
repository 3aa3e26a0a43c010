/** The time, as an argument: code that depends on it gets one of these and never asks the machine itself. */
export interface Clock {
  now(): Date
}

export const systemClock: Clock = { now: () => new Date() }

/** A clock that stands still until it is moved: for tests, and for demo data of days gone by. */
export interface SettableClock extends Clock {
  set(time: Date): void
  /** Moves it by so many milliseconds. */
  advance(milliseconds: number): void
}

export function settableClock(start: Date): SettableClock {
  let time = start.getTime()
  return {
    now: () => new Date(time),
    set: (next) => {
      time = next.getTime()
    },
    advance: (milliseconds) => {
      time += milliseconds
    },
  }
}
