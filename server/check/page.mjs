// Builds build/check-page/check.html: the check in the browser as one file, with its worker, styles and fonts inside. It is
// served as /check.html, and works from a disk with the network off. A policy in its head lets only its own script run and
// forbids every connection.
import { createHash } from 'node:crypto'
import { mkdirSync, readdirSync, readFileSync, renameSync, writeFileSync } from 'node:fs'
import { dirname, join, relative } from 'node:path'
import { fileURLToPath } from 'node:url'
import tailwindcss from '@tailwindcss/vite'
import react from '@vitejs/plugin-react'
import { build } from 'vite'

const here = dirname(fileURLToPath(import.meta.url))
const root = join(here, '..', '..')
const out = join(root, 'build', 'check-page')

/** Packages whose code or fonts are in the file, worker included: their licences have to go along. */
const packages = new Set([
  '@fontsource-variable/atkinson-hyperlegible-next',
  '@fontsource-variable/bricolage-grotesque',
  '@fontsource/ibm-plex-mono',
])
const notePackages = {
  name: 'note-packages',
  transform(_code, id) {
    const match = /^.*\/node_modules\/((?:@[^/]+\/)?[^/]+)/.exec(id)
    if (match) packages.add(match[1])
    return null
  },
}
/** The file carries the Latin letters in the weights that the page is set in most; the rest falls to the system's fonts. */
const fewerFonts = {
  name: 'fewer-fonts',
  enforce: 'pre',
  transform(code, id) {
    if (!/\/ui\/css\/fonts\.css/.test(id) && !/\/entry\/check-file\.css/.test(id)) return null
    return code.replace(/@font-face \{[^}]*(?:latin-ext|latin-[56]00)[^}]*\}/g, '')
  },
}

const result = await build({
  root,
  configFile: false,
  logLevel: 'warn',
  publicDir: false,
  plugins: [notePackages, fewerFonts, react(), tailwindcss()],
  worker: { plugins: () => [notePackages] },
  build: {
    write: false,
    target: 'es2022',
    modulePreload: false,
    cssCodeSplit: false,
    assetsInlineLimit: Number.MAX_SAFE_INTEGER,
    rollupOptions: { input: 'src/entry/check-file.tsx' },
  },
})
const [{ output }] = [result].flat()
const chunks = output.filter((item) => item.type === 'chunk')
const styles = output.filter((item) => item.type === 'asset' && item.fileName.endsWith('.css'))
if (chunks.length !== 1 || chunks[0].imports.length > 0 || styles.length !== 1 || output.length !== 2) {
  throw new Error(`The check page did not become one file: ${output.map((item) => item.fileName).join(', ')}.`)
}

// Inside an element these would end it, or begin a comment in it.
const script = chunks[0].code.trim().replace(/<(?=\/script|!--)/gi, '\\x3C')
const style = fewerFonts.transform(String(styles[0].source), '/ui/css/fonts.css').trim()
if (/<\/style/i.test(style)) throw new Error('The style sheet holds the end of a style element.')
for (const [what, text] of [
  ['script', script],
  ['style sheet', style],
]) {
  if (text.includes(root)) throw new Error(`The ${what} names a folder of this machine.`)
}
for (const address of style.matchAll(/url\(\s*["']?([^"')]{1,60})/g)) {
  if (!address[1].startsWith('data:')) throw new Error(`The style sheet reaches outside the file: ${address[1]}`)
}

const hashOf = (text) => `'sha256-${createHash('sha256').update(text).digest('base64')}'`
const policy = [
  "default-src 'none'",
  // WebAssembly hashes four times as fast as JavaScript; this allows it and no other evaluation of text.
  `script-src ${hashOf(script)} 'wasm-unsafe-eval'`,
  `style-src ${hashOf(style)}`,
  'font-src data:',
  'img-src data:',
  'worker-src blob:',
  "base-uri 'none'",
  "form-action 'none'",
].join('; ')
const icon = `data:image/svg+xml;base64,${readFileSync(join(root, 'public', 'favicon.svg')).toString('base64')}`

const html = `<!doctype html>
<html lang="en-GB">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${policy}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="color-scheme" content="light dark">
<meta name="robots" content="noindex">
<title>Check a draw yourself · Evenpenny</title>
<link rel="icon" href="${icon}">
<style>${style}</style>
</head>
<body>
<div id="root"></div>
<noscript><p>This page does its work in JavaScript, which is switched off here. Without it, unpack the archive and run the check that lies in it: node check.mjs</p></noscript>
<script type="module">${script}</script>
<!--
${licences()}
-->
</body>
</html>
`
mkdirSync(out, { recursive: true })
const waiting = join(out, `.check.html.${process.pid}`)
writeFileSync(waiting, html)
renameSync(waiting, join(out, 'check.html'))
console.log(`Wrote ${relative(root, out)}/check.html, ${Math.round(html.length / 1000)} kB`)

function licences() {
  const texts = [...packages].sort().map((name) => {
    const folder = join(root, 'node_modules', name)
    const { version } = JSON.parse(readFileSync(join(folder, 'package.json'), 'utf8'))
    const file = readdirSync(folder).find((each) => /^licen[cs]e/i.test(each))
    if (!file) throw new Error(`${name} has no licence file to go along with its code.`)
    return `${name} ${version}\n\n${readFileSync(join(folder, file), 'utf8').trim()}`
  })
  // Two hyphens could end the comment.
  return texts.join('\n\n').replaceAll('--', '- -')
}
