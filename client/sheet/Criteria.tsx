import type { AssessedCurve, CriterionResult } from '../../shared/schema/curve-row.ts';
import { copyText } from '../parts/copy.ts';
import {
  criterionDecimals,
  criterionName,
  curveSentence,
  limitQuantity,
  quantity,
  shownInterval,
} from '../parts/text.ts';
import { shownUnit, SI_UNITS } from '../parts/units.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { UtilisationBar } from '../ledger/UtilisationBar.tsx';

/** Every criterion with its working; while something is tried, the figures as tried. */
export function Criteria({
  recorded,
  tried,
}: {
  readonly recorded: AssessedCurve;
  readonly tried: AssessedCurve | null;
}) {
  const shown = tried ?? recorded;
  const judged = shown.criteria.filter(({ verdict }) => verdict !== 'not assessed');
  const rest = shown.criteria.filter(({ verdict }) => verdict === 'not assessed');
  return (
    <section class="whole">
      <div class="row">
        <h3 class="grow">{tried === null ? 'Criteria' : 'Criteria as tried'}</h3>
        <button
          type="button"
          class="small no-print"
          onClick={() => void copyText(workingText(shown), 'The working is copied')}
        >
          Copy working
        </button>
      </div>
      {judged.map((criterion) => (
        <Criterion
          key={criterion.criterion}
          result={criterion}
          isGoverning={criterion.criterion === shown.row.governing_criterion}
        />
      ))}
      {rest.length > 0 && (
        <details class="section">
          <summary>Not judged ({rest.length}): no limit in the set, or something missing</summary>
          {rest.map((criterion) => (
            <Criterion key={criterion.criterion} result={criterion} isGoverning={false} />
          ))}
        </details>
      )}
    </section>
  );
}

function Criterion({ result, isGoverning }: { readonly result: CriterionResult; readonly isGoverning: boolean }) {
  const units = useSlice(app, (s) => s.units);
  const decimals = criterionDecimals(result.criterion);
  const isConverted = shownUnit(result.unit, units) !== result.unit;
  const interval =
    result.low === null ? '' : ` (${shownInterval(result.low, result.high, result.unit, decimals, units)})`;
  return (
    <details class="criterion" open={isGoverning}>
      <summary>
        <span class="criterion-name">{criterionName(result.criterion)}</span>
        <Verdict verdict={result.verdict} />
        <span class="criterion-figures">
          {result.value === null ? 'no value' : `${quantity(result.value, result.unit, decimals, units)}${interval}`}
          {result.limit === null
            ? ', no limit set'
            : `, limit ${limitQuantity(result.limit, result.unit, decimals, units)}`}
        </span>
        <UtilisationBar value={result.utilisation} verdict={result.verdict} />
      </summary>
      {result.reason !== '' && <p>{result.reason.replace(/\.?$/, '.')}</p>}
      {result.working.length > 0 && <pre class="working">{result.working.join('\n')}</pre>}
      <p class="quiet-text">
        Source of the limit: {result.source === '' ? 'none' : result.source}
        {isConverted && result.working.length > 0 ? '. The working stays in SI units.' : ''}
      </p>
    </details>
  );
}

/** The sentence and every criterion with its lines, as plain text in SI units. */
function workingText(curve: AssessedCurve): string {
  const parts = curve.criteria.map((c) =>
    [`${criterionName(c.criterion)}: ${c.verdict}`, ...c.working, c.source, c.reason]
      .filter((l) => l !== '')
      .join('\n'),
  );
  return [curveSentence(curve, SI_UNITS), ...parts].join('\n\n');
}
