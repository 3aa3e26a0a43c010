import './check-file.css'
import { createRoot } from 'react-dom/client'
import { CheckPanel } from '#src/features/check/components/check-panel.tsx'
import InlineWorker from '#src/features/check/worker/check-worker.ts?worker&inline'
import { Mark, Wordmark } from '#src/ui/brand.tsx'
import { Title } from '#src/ui/page.tsx'

/** The check as a page of its own: one file with the worker inside, for any archive, with the network off. */
function CheckFile() {
  return (
    <div className="page">
      <header className="row masthead">
        <div className="stub">
          <Wordmark />
        </div>
      </header>
      <main id="main">
        <Title
          title="Check a draw yourself"
          lead="Give it a proof archive. It does every step on this device and needs no network: save this page and keep it."
          stub={<p className="stub-facts mt-0">One file. It forbids itself all connections.</p>}
        />
        <CheckPanel
          createWorker={() => new InlineWorker({ name: 'check' })}
          archive={null}
          publishedKey={null}
          demo
          watchesLog={false}
        />
      </main>
      <footer className="row footer">
        <div className="stub">
          <Mark />
        </div>
        <div className="body">
          <p className="measure">
            The promoter of each draw answers for it. Archives stand beside the page of every draw that was drawn, and
            fingerprints on posters and tickets.
          </p>
        </div>
      </footer>
    </div>
  )
}

const root = document.getElementById('root')
if (root) createRoot(root).render(<CheckFile />)
