import type { Attachment, ParsedMail } from 'mailparser'
import { escapeHtml, linkedHtml } from '#shared/text/links.ts'
import type { StoredMail } from './mail-store.ts'

/** The pages on which the mails of a development machine are read: plain HTML, no script. */

const style = `
:root{color-scheme:light dark;--paper:#FAFAF6;--tint:#EFF0EA;--ink:#18211F;--ink-2:#4A5651;--rule:#C9CDC4;--line:#737D77}
@media (prefers-color-scheme:dark){:root{--paper:#141917;--tint:#1F2623;--ink:#ECEDE6;--ink-2:#B3BCB5;--rule:#3B4641;--line:#8A958F}}
*{box-sizing:border-box}
body{margin:0;padding:28px clamp(20px,7vw,120px) 56px;background:var(--paper);color:var(--ink);font:400 18px/28px 'Atkinson Hyperlegible Next',system-ui,sans-serif;overflow-wrap:anywhere}
main{max-width:900px}
h1{margin:28px 0 14px;font-size:34px;line-height:42px;text-wrap:balance}
p{max-width:37em;margin:0 0 14px}
a{color:inherit;text-decoration-thickness:1.5px;text-underline-offset:4px;text-decoration-color:var(--line)}
a:hover{text-decoration-thickness:3px;text-decoration-color:currentColor}
:focus-visible{outline:3px solid var(--ink);outline-offset:3px}
.note,dt,time{color:var(--ink-2);font-size:16px;line-height:24px}
code,pre{font:400 16px/24px 'IBM Plex Mono',ui-monospace,monospace}
form{display:flex;flex-wrap:wrap;gap:14px;align-items:end;margin-bottom:28px}
label{display:block;font-size:16px;line-height:24px}
input{min-height:48px;width:min(22em,100%);padding:9px 14px;border:2px solid var(--line);border-radius:3px;background:var(--paper);color:inherit;font:inherit}
button{min-height:48px;padding:9px 20px;border:2px solid var(--ink);border-radius:3px;background:var(--ink);color:var(--paper);font:inherit;font-weight:600;cursor:pointer}
ol{list-style:none;margin:0;padding:0}
li{padding:14px 0;border-top:1px solid var(--rule)}
li>*{display:block}
dl{display:grid;grid-template-columns:max-content minmax(0,1fr);gap:0 28px;margin:0 0 28px}
dd{margin:0}
@media (max-width:600px){dl{grid-template-columns:minmax(0,1fr)}dd{margin-bottom:7px}}
.letter{padding:28px 0;border:solid var(--rule);border-width:1px 0;white-space:pre-wrap}
`

function page(title: string, body: string): string {
  return `<!doctype html>
<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width">
<meta name="robots" content="noindex"><title>${escapeHtml(title)} – local mail</title><style>${style}</style></head>
<body><main>${body}</main></body></html>
`
}

const shortTime = (iso: string) => `${iso.slice(0, 10)} ${iso.slice(11, 19)} UTC`

export function listPage(mails: readonly StoredMail[], to: string): string {
  const entries = mails.map(
    (mail) => `<li><a href="/mails/${mail.number}">${escapeHtml(mail.subject || '(no subject)')}</a>
<span>To ${escapeHtml(mail.to.join(', '))}</span>
<time datetime="${escapeHtml(mail.receivedAt)}">${shortTime(mail.receivedAt)}</time>
${mail.attachments.length > 0 ? `<span class="note">With ${escapeHtml(mail.attachments.join(', '))}</span>` : ''}
<span class="note">Message-ID <code>${escapeHtml(mail.messageId)}</code></span></li>`,
  )
  const count = mails.length === 1 ? 'One mail' : `${mails.length} mails`
  return page(
    'Mails',
    `<h1>Local mail</h1>
<p>Mails that this machine has sent end here and go nowhere else. Newest first.</p>
<form method="get" action="/"><div><label for="to">Only mails to this address</label>
<input id="to" name="to" type="text" inputmode="email" value="${escapeHtml(to)}"></div><button type="submit">Show</button></form>
<p>${count}${to ? ` to ${escapeHtml(to)}. <a href="/">Show all mails</a>` : ''}</p>
<ol>${entries.join('\n')}</ol>`,
  )
}

export function mailPage(mail: StoredMail, parsed: ParsedMail): string {
  const attachments = parsed.attachments.map(
    (attachment, index) =>
      `<li><a href="/mails/${mail.number}/attachments/${index}">${escapeHtml(attachmentName(attachment, index))}</a>
<span class="note">${attachment.size} bytes, ${escapeHtml(attachment.contentType)}</span></li>`,
  )
  const replyTo = parsed.replyTo?.text
  return page(
    mail.subject || '(no subject)',
    `<p><a href="/">All mails</a> · <a href="/?to=${encodeURIComponent(mail.to[0] ?? '')}">All mails to ${escapeHtml(mail.to[0] ?? '')}</a></p>
<h1>${escapeHtml(mail.subject || '(no subject)')}</h1>
<dl><dt>From</dt><dd>${escapeHtml(parsed.from?.text ?? mail.from)}</dd>
<dt>To</dt><dd>${escapeHtml(mail.to.join(', '))}</dd>
${replyTo ? `<dt>Reply to</dt><dd>${escapeHtml(replyTo)}</dd>` : ''}
<dt>Received</dt><dd><time datetime="${escapeHtml(mail.receivedAt)}">${shortTime(mail.receivedAt)}</time></dd>
<dt>Message-ID</dt><dd><code>${escapeHtml(mail.messageId)}</code></dd></dl>
<div class="letter">${linkedHtml((parsed.text ?? '').trimEnd())}</div>
${attachments.length > 0 ? `<h2>Attachments</h2><ol>${attachments.join('\n')}</ol>` : ''}
<p>${typeof parsed.html === 'string' ? `<a href="/mails/${mail.number}/html">Its HTML part</a> · ` : ''}<a href="/mails/${mail.number}/raw">The mail as it was sent</a></p>`,
  )
}

export const attachmentName = (attachment: Attachment, index: number) => attachment.filename ?? `part-${index + 1}`

export const notFoundPage = () => page('Not here', '<h1>There is no such page</h1><p><a href="/">See all mails</a></p>')
