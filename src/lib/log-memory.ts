/** Where a browser keeps the newest checkpoint of the site's log that it has verified: the signed note, as text. */
export const LOG_MEMORY = 'evenpenny-log-head'
