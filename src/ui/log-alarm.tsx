import { CopyButton } from './copy-button.tsx'
import { Notice } from './notice.tsx'

interface LogAlarmProps {
  readonly title: string
  readonly words: string
  /** Signed checkpoints that do not go together, as text, the older one first. */
  readonly evidence: readonly string[]
}

/** The site's log is not what it was: said by name, with what proves it to others. */
export function LogAlarm({ title, words, evidence }: LogAlarmProps) {
  return (
    <Notice title={title} fault>
      <p>{words}</p>
      {evidence.map((note, index) => (
        <div key={index} className="mt-unit">
          <p>{evidence.length === 1 ? 'The checkpoint:' : index === 0 ? 'Seen before:' : 'Shown now:'}</p>
          <code className="command" tabIndex={0}>
            {note}
          </code>
          <p>
            <CopyButton value={note} what={`checkpoint ${index + 1}`} text="Copy this checkpoint" />
          </p>
        </div>
      ))}
    </Notice>
  )
}
