import { useApp } from '#src/lib/app-context.ts'

interface HeadProps {
  /** Without the site's name, which is added. */
  readonly title: string
  readonly description: string
  /** The page's one address, from the root: `/draws/spring`. Left out where the page must not be indexed. */
  readonly path?: string
  readonly type?: 'website' | 'article'
}

/** Title, description, canonical address and social card of a page. React moves them into the document's head. */
export function Head({ title, description, path, type = 'website' }: HeadProps) {
  const { origin } = useApp()
  const full = title === 'Evenpenny' ? 'Evenpenny: prize draws that anyone can check' : `${title} · Evenpenny`
  const address = path === undefined ? undefined : origin + path
  return (
    <>
      <title>{full}</title>
      <meta name="description" content={description} />
      {address ? <link rel="canonical" href={address} /> : <meta name="robots" content="noindex" />}
      <meta property="og:site_name" content="Evenpenny" />
      <meta property="og:type" content={type} />
      <meta property="og:locale" content="en_GB" />
      <meta property="og:title" content={title} />
      <meta property="og:description" content={description} />
      {address ? <meta property="og:url" content={address} /> : null}
      <meta property="og:image" content={`${origin}/card.png`} />
      <meta property="og:image:width" content="1200" />
      <meta property="og:image:height" content="630" />
      <meta
        property="og:image:alt"
        content="Evenpenny: a bar split in proportion to tickets, the side that a coin chose opening out to full width"
      />
      <meta name="twitter:card" content="summary_large_image" />
    </>
  )
}
