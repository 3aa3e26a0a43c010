/**
 * Draws public/card.png, the picture that other sites show beside a link: the ladder of an invented walk, to scale.
 * `node --import tsx tests/support/public-pages/card.tsx`, with Debian's Chromium.
 */
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { chromium } from '@playwright/test'
import { renderToStaticMarkup } from 'react-dom/server'
import { MiniLadder } from '#src/features/ladder/mini-ladder.tsx'
import { Wordmark } from '#src/ui/brand.tsx'
import { drawnDraw } from './fixtures.ts'

const root = join(import.meta.dirname, '..', '..', '..')
const css = (path: string) => readFileSync(join(root, 'src', path), 'utf8')
const font = readFileSync(
  join(root, 'node_modules/@fontsource-variable/bricolage-grotesque/files/bricolage-grotesque-latin-opsz-normal.woff2'),
).toString('base64')
const pick = drawnDraw().result?.picks[0]
if (!pick) throw new Error('the invented draw has a first pick')

const html = `<!doctype html><html data-theme="light"><style>
@font-face{font-family:"Bricolage Grotesque Variable";src:url(data:font/woff2;base64,${font});font-weight:200 800}
${css('ui/css/tokens.css')}${css('ui/css/layout.css')}${css('features/ladder/ladder.css')}
body{margin:0;background:var(--paper);width:1200px;height:630px;overflow:hidden;position:relative}
.edge{position:absolute;inset:0 0 auto;height:18px;border-top:2px solid var(--ink);background:repeating-linear-gradient(90deg,var(--ink) 0 4px,transparent 4px 10px)}
.holes{position:absolute;top:18px;bottom:0;left:96px;width:10px;background:radial-gradient(circle at 5px 5px,var(--line) 3.2px,transparent 4.2px) 0 0/10px 28px repeat-y}
.wordmark{position:absolute;left:150px;top:66px;width:330px}
p{position:absolute;left:150px;top:158px;margin:0;font:620 76px/76px var(--display);letter-spacing:-.03em;color:var(--ink);width:980px;text-wrap:balance}
.mini{position:absolute;left:150px;top:342px}
.mini .hair{stroke-width:1.1}
</style><body><div class="edge"></div><div class="holes"></div>${renderToStaticMarkup(<Wordmark />)}
<p>Prize draws that anyone can check</p>
${renderToStaticMarkup(<MiniLadder coins={pick.coins} size={{ width: 960, bar: 18, fan: 29 }} />)}</body></html>`

const browser = await chromium.launch({ executablePath: '/usr/bin/chromium', args: ['--no-sandbox', '--disable-gpu'] })
const page = await browser.newPage({ viewport: { width: 1200, height: 630 } })
await page.setContent(html)
await page.evaluate(() => document.fonts.ready)
await page.screenshot({ path: join(root, 'public', 'card.png') })
await browser.close()
