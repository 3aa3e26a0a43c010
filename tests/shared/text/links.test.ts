import { describe, expect, it } from 'vitest'
import { escapeHtml, linkedHtml, splitLinks } from '#shared/text/links.ts'

describe('splitLinks', () => {
  it('finds addresses and leaves the marks behind them outside', () => {
    expect(splitLinks('See https://site.example/a?b=1&c=2. (Or http://x.example/y).')).toEqual([
      { kind: 'words', text: 'See ' },
      { kind: 'link', text: 'https://site.example/a?b=1&c=2' },
      { kind: 'words', text: '. (Or ' },
      { kind: 'link', text: 'http://x.example/y' },
      { kind: 'words', text: ').' },
    ])
  })

  it('loses nothing and makes no link of another scheme', () => {
    for (const text of [
      '',
      'plain',
      'javascript:alert(1)',
      'https://a.example',
      'https://...',
      'a\nhttps://b.example\nc',
    ]) {
      const pieces = splitLinks(text)
      expect(pieces.map((piece) => piece.text).join('')).toBe(text)
      for (const piece of pieces) if (piece.kind === 'link') expect(piece.text).toMatch(/^https?:/)
    }
    expect(splitLinks('javascript:alert(1)')).toEqual([{ kind: 'words', text: 'javascript:alert(1)' }])
  })
})

describe('linkedHtml', () => {
  it('escapes what is written around and inside an address', () => {
    expect(escapeHtml(`<b class="x">&'`)).toBe('&lt;b class=&quot;x&quot;&gt;&amp;&#39;')
    expect(linkedHtml('<i> https://a.example/?q=1&r="x"')).toBe(
      '&lt;i&gt; <a href="https://a.example/?q=1&amp;r=">https://a.example/?q=1&amp;r=</a>&quot;x&quot;',
    )
  })
})
