export { eventMeaning, eventTitle } from '#shared/log/event-words.ts'
