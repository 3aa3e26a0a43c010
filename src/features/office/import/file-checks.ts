import { MAX_FILE_BYTES } from '#shared/entrants/file-limit.ts'
import { formatBytes } from '#src/ui/format-number.ts'

/** What is wrong with a chosen file before it is sent, and what to do; null where nothing can be seen yet. */
export function fileProblem(file: Pick<File, 'name' | 'size'>): string | null {
  if (/\.(xlsx?|xlsm|xlsb|ods|numbers)$/i.test(file.name)) {
    return 'This is a spreadsheet. Open it, save the sheet as “CSV UTF-8”, and choose that file.'
  }
  if (/\.(pdf|docx?|zip|png|jpe?g|heic)$/i.test(file.name)) {
    return 'This is no list in CSV. Save the list from your spreadsheet as “CSV UTF-8”, and choose that file.'
  }
  if (file.size === 0) return 'This file is empty. Save it again from your spreadsheet, and choose it once more.'
  if (file.size > MAX_FILE_BYTES) {
    return `This file has ${formatBytes(file.size)}; the site takes at most 200 MB. Split it into several and bring them in one after another.`
  }
  return null
}
