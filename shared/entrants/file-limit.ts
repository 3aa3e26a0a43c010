/** The largest file of entrants that is taken, in bytes (200 MB): about three million rows. */
export const MAX_FILE_BYTES = 200_000_000
