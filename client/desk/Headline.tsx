import type { CurveRow } from '../../shared/schema/curve-row.ts';
import { byWorst, counted, governingText } from '../parts/text.ts';
import { app, chooseCurve, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { NO_FILTER } from '../ledger/filter.ts';
import { LogMenu } from './LogMenu.tsx';
import { Ribbon } from './Ribbon.tsx';
import { SetupMenu } from './SetupMenu.tsx';

/** What the run says in two lines, its curves as a ribbon, and by what it is judged. */
export function Headline({ open }: { readonly open: OpenRun }) {
  const units = useSlice(app, (s) => s.units);
  const worst = [...open.curves].sort(byWorst)[0];
  const isWithin = worst === undefined || worst.row.verdict === 'within';
  return (
    <section class="headline" aria-label="Result">
      <div class="result">
        <p class="tally">{tally(open)}</p>
        {isWithin ? (
          <p class="quiet-text">
            {worst === undefined
              ? 'No curve could be told from straight in this run.'
              : `The closest to its limit is curve ${String(worst.row.curve)}.`}
          </p>
        ) : (
          <button type="button" class="worst" onClick={() => chooseCurve(worst.row.curve)}>
            Worst: curve {worst.row.curve}, {governingText(worst, units) ?? worst.row.verdict}
          </button>
        )}
      </div>
      <Ribbon open={open} />
      <div class="judged">
        <SetupMenu open={open} />
        <LogMenu open={open} />
      </div>
    </section>
  );
}

/** "4 of 22 curves are over, 6 undecided": each count shows these curves in the ledger. */
function tally(open: OpenRun) {
  const count = (verdict: CurveRow['verdict']) => open.curves.filter(({ row }) => row.verdict === verdict).length;
  const over = count('over');
  const all = open.curves.length;
  if (all === 0) return <strong>No curves</strong>;
  const show = (verdict: CurveRow['verdict']) =>
    app.set({ filter: { ...NO_FILTER, verdicts: [verdict] }, tab: 'ledger' });
  const rest = (['undecided', 'not assessed'] as const).filter((verdict) => count(verdict) > 0);
  return (
    <>
      <button
        type="button"
        class={`count lead-count${over > 0 ? ' over' : ''}`}
        disabled={over === 0}
        onClick={() => show('over')}
      >
        {over === 0 ? `None of ${counted(all, 'curve')}` : `${String(over)} of ${counted(all, 'curve')}`}{' '}
        {over === 1 ? 'is' : 'are'} over
      </button>
      {rest.map((verdict) => (
        <span key={verdict}>
          ,{' '}
          <button type="button" class="count" onClick={() => show(verdict)}>
            {count(verdict)} {verdict}
          </button>
        </span>
      ))}
    </>
  );
}
