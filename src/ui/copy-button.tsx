import { useState } from 'react'
import { useHydrated } from './use-hydrated.ts'

interface CopyButtonProps {
  readonly value: string
  /** What is copied, for those who hear the button apart from its line: "the seal". */
  readonly what: string
  readonly text?: string
}

/** Copies a value. Holds its place but stays unseen until it can work, which without JavaScript is never. */
export function CopyButton({ value, what, text = 'Copy' }: CopyButtonProps) {
  const ready = useHydrated()
  const [done, setDone] = useState<'copied' | 'refused' | null>(null)
  async function copy() {
    try {
      await navigator.clipboard.writeText(value)
      setDone('copied')
    } catch {
      setDone('refused')
    }
  }
  return (
    <>
      <button type="button" className={ready ? 'copy' : 'copy invisible'} onClick={() => void copy()}>
        {done === 'copied' ? 'Copied' : text}
        <span className="vh"> {what}</span>
      </button>
      <span role="status" className={done === 'refused' ? 'small' : 'vh'}>
        {done === 'copied'
          ? `Copied ${what}.`
          : done === 'refused'
            ? ' The browser refused. Mark the digits and copy them.'
            : ''}
      </span>
    </>
  )
}
