import { Flip } from './weighing.tsx'

/** How to read a weighing: three pairs and their words. */
export function ReadingKey() {
  return (
    <ul className="key">
      <li>
        <span className="weigh" aria-hidden="true">
          <span className="rung decides heads">
            <Flip flip={0} />
            <span className="sign" data-sign="<">
              &lt;
            </span>
            <span className="digit">1</span>
          </span>
        </span>
        <span>
          Flip lower than the digit:{' '}
          <span className="nb">
            <i className="disc" /> <b>heads</b>.
          </span>{' '}
          The walk goes left.
        </span>
      </li>
      <li>
        <span className="weigh" aria-hidden="true">
          <span className="rung decides tails">
            <Flip flip={1} />
            <span className="sign" data-sign=">">
              &gt;
            </span>
            <span className="digit">0</span>
          </span>
        </span>
        <span>
          Flip higher than the digit:{' '}
          <span className="nb">
            <i className="ring" /> <b>tails</b>.
          </span>{' '}
          The walk goes right.
        </span>
      </li>
      <li>
        <span className="weigh" aria-hidden="true">
          <span className="rung">
            <Flip flip={1} />
            <span className="sign" data-sign="=">
              =
            </span>
            <span className="digit">1</span>
          </span>
        </span>
        <span>Both the same: nothing is decided. Flip again, against the next digit.</span>
      </li>
    </ul>
  )
}
