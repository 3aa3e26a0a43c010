/** A place that speaks politely when its words change, without moving focus or anything on the page. */
export function Announcer({ words }: { readonly words: string }) {
  return (
    <p className="vh" role="status" aria-live="polite">
      {words}
    </p>
  )
}
