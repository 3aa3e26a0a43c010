import type { ImportView } from '#shared/schemas/api/office.ts'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'
import { rowList } from './import-words.ts'
import { groupProblems } from './problem-groups.ts'

/** Every error with its row and what to do, by kind where there are many. */
export function ImportProblems({ view }: { readonly view: Pick<ImportView, 'errors' | 'errorCount'> }) {
  const { errors, errorCount } = view
  return (
    <Part
      title={countOf(errorCount, 'error')}
      note="Rows are counted as in your spreadsheet: the names of the columns are row 1."
    >
      <ol className="problems">
        {groupProblems(errors).map((group) => (
          <li key={`${group.rows[0]} ${group.column} ${group.message}`}>
            <span className="at">Row {formatNumber(group.rows[0] ?? 0)}</span>
            <div>
              <p>{group.message}</p>
              {group.rows.length > 1 ? (
                <p className="note">The same in {rowList(group.rows.slice(1)).replace(/^Row/, 'row')}.</p>
              ) : null}
            </div>
          </li>
        ))}
      </ol>
      {errorCount > errors.length ? (
        <p className="note mt-unit-2">
          These are the first {formatNumber(errors.length)} of {countOf(errorCount, 'error')}. Put them right and bring
          the file in again to see whether others are left.
        </p>
      ) : null}
    </Part>
  )
}
