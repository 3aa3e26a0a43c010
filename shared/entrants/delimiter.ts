/**
 * What stands between the cells of a CSV file, by its first line: a comma, or a semicolon or tab where that stands there
 * more often, as spreadsheets write them in many countries. What is inside quotation marks does not count.
 */
export function sniffDelimiter(head: string): ',' | ';' | '\t' {
  const line = (/^[^\r\n]*/.exec(head)?.[0] ?? '').replace(/"[^"]*"/g, '')
  const count = (character: string) => line.split(character).length - 1
  const commas = count(',')
  if (count(';') > commas && count(';') >= count('\t')) return ';'
  return count('\t') > commas ? '\t' : ','
}
