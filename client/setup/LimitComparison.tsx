import { compareLimitSets } from '../../shared/limits/compare.ts';
import { criterionOf } from '../../shared/limits/criteria.ts';
import type { LimitSet } from '../../shared/schema/limit-set.ts';
import { criterionName, unitText } from '../parts/text.ts';
import { bandText, limitFigure } from './limit-text.ts';

/** Two sets side by side; rows that differ say so in a word as well as by weight. */
export function LimitComparison({ a, b }: { readonly a: LimitSet; readonly b: LimitSet }) {
  const cell = (entry: ReturnType<typeof compareLimitSets>[number]['first']) =>
    entry === null ? (
      <span class="quiet-text">no value</span>
    ) : (
      <ul class="bands" title={entry.source}>
        {entry.bands.map((band, i) => (
          <li key={i}>
            {limitFigure(band.normal)} / {limitFigure(band.exceptional)}
            {bandText(band) === 'always' ? '' : <span class="quiet-text"> {bandText(band)}</span>}
          </li>
        ))}
      </ul>
    );
  return (
    <div class="scroll-x" tabIndex={0} role="region" aria-label="Comparison">
      <table class="plain">
        <caption class="quiet-text">Normal / exceptional</caption>
        <thead>
          <tr>
            <th scope="col">Criterion</th>
            <th scope="col">Unit</th>
            <th scope="col">{a.name}</th>
            <th scope="col">{b.name}</th>
            <th scope="col">Same?</th>
          </tr>
        </thead>
        <tbody>
          {compareLimitSets(a, b).map(({ criterion, first, second, same }) => (
            <tr key={criterion} class={same ? '' : 'differs'}>
              <th scope="row">{criterionName(criterion)}</th>
              <td>{unitText(criterionOf(criterion).unit)}</td>
              <td>{cell(first)}</td>
              <td>{cell(second)}</td>
              <td>{same ? 'same' : 'differs'}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
