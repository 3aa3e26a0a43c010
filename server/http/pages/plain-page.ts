import { STATUS_CODES } from 'node:http'

/** The page of last resort, where the real one could not be made: no script, no data, no style of its own. */
export function plainPage(status: number, detail: string, requestId: string): string {
  const title = STATUS_CODES[status] ?? 'Error'
  return `<!doctype html>
<html lang="en-GB">
<head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="robots" content="noindex"><title>${escape(title)} · Evenpenny</title></head>
<body><main><h1>${escape(title)}</h1><p>${escape(detail)}</p>
<p>If you report this, give the number ${escape(requestId)}.</p><p><a href="/">Go to the first page</a></p></main></body>
</html>
`
}

const escape = (text: string) => text.replace(/[&<>"']/g, (character) => `&#${character.charCodeAt(0)};`)
