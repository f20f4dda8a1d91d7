import { checkLimitSet } from '../../shared/limits/check.ts';
import { CRITERIA, criterionOf } from '../../shared/limits/criteria.ts';
import type { CriterionId, LimitSet } from '../../shared/schema/limit-set.ts';
import { api } from '../api.ts';
import { criterionName, unitText } from '../parts/text.ts';
import { notify, report } from '../state/app-state.ts';
import { refreshCatalogue } from '../state/open-run.ts';
import { useDraft } from './use-draft.ts';
import { bandText, limitFigure } from './limit-text.ts';

type Limits = LimitSet['limits'];

const OPERATOR: Limits[number]['source'] = { document: 'operator', clause: '', year: null, status: 'operator' };

/** The values of a set with their sources; of the user's own sets they can be changed, added and taken out. */
export function LimitTable({ set, editable }: { readonly set: LimitSet; readonly editable: boolean }) {
  const { draft, isChanged, setDraft, undo } = useDraft(set);
  const problems = editable ? checkLimitSet(draft) : [];
  const change = (limits: Limits) => setDraft({ ...draft, limits });
  return (
    <>
      {editable && (
        <div class="row">
          <label class="row grow">
            Name
            <input
              type="text"
              class="grow"
              value={draft.name}
              onInput={(e) => setDraft({ ...draft, name: e.currentTarget.value })}
            />
          </label>
          <button
            type="button"
            class="primary"
            disabled={!isChanged || problems.some(({ severity }) => severity === 'serious')}
            onClick={() => void save(draft)}
          >
            Save changes
          </button>
          <button type="button" disabled={!isChanged} onClick={undo}>
            Undo
          </button>
        </div>
      )}
      {problems.length > 0 && (
        <ul class="problems" role="alert">
          {problems.map(({ message, severity }) => (
            <li key={message}>
              {severity === 'serious' ? 'Cannot be saved: ' : ''}
              {message}
            </li>
          ))}
        </ul>
      )}
      <div class="scroll-x" tabIndex={0} role="region" aria-label="Limits">
        <table class="plain">
          <thead>
            <tr>
              <th scope="col">Criterion</th>
              <th scope="col">Applies</th>
              <th scope="col" class="num">
                Normal
              </th>
              <th scope="col" class="num">
                Exceptional
              </th>
              <th scope="col">Unit</th>
              <th scope="col">Source</th>
              {editable && <th scope="col" />}
            </tr>
          </thead>
          <tbody key={isChanged ? 'draft' : 'kept'}>
            {draft.limits.flatMap((limit, k) =>
              limit.bands.map((band, b) => (
                <tr key={`${limit.criterion}-${String(b)}`} class={b > 0 ? 'same' : ''}>
                  <th scope="row">
                    <span class={b === 0 ? '' : 'sr'}>{criterionName(limit.criterion)}</span>
                  </th>
                  <td>{bandText(band)}</td>
                  {(['normal', 'exceptional'] as const).map((tier) => (
                    <td class="num" key={tier}>
                      {editable ? (
                        <input
                          type="text"
                          inputMode="decimal"
                          size={7}
                          class="num"
                          aria-label={`${criterionName(limit.criterion)}, ${bandText(band)}, ${tier}`}
                          defaultValue={band[tier]?.toString() ?? ''}
                          onChange={(e) => {
                            const next = withValue(draft.limits, k, b, tier, e.currentTarget.value);
                            if (next === null) e.currentTarget.value = band[tier]?.toString() ?? '';
                            else change(next);
                          }}
                        />
                      ) : (
                        limitFigure(band[tier])
                      )}
                    </td>
                  ))}
                  <td>{unitText(criterionOf(limit.criterion).unit)}</td>
                  <td class="source">{b === 0 && <Source source={limit.source} />}</td>
                  {editable && (
                    <td>
                      {b === 0 && (
                        <button
                          type="button"
                          class="quiet small"
                          aria-label={`Take out ${criterionName(limit.criterion)}`}
                          onClick={() => change(draft.limits.filter((_, i) => i !== k))}
                        >
                          Take out
                        </button>
                      )}
                    </td>
                  )}
                </tr>
              )),
            )}
          </tbody>
        </table>
      </div>
      {editable && <AddCriterion set={draft} onAdd={(criterion) => change([...draft.limits, blank(criterion)])} />}
    </>
  );
}

function Source({ source }: { readonly source: Limits[number]['source'] }) {
  return (
    <>
      {source.document}
      {source.clause === '' ? '' : `, ${source.clause}`}
      {source.year === null ? '' : `, ${String(source.year)}`}
      {source.status === 'operator' && source.document === 'operator' ? (
        ''
      ) : (
        <small class={source.status === 'memory' ? 'doubt' : ''}>
          {source.status === 'memory' ? 'recalled, not read: check it before use' : source.status}
        </small>
      )}
    </>
  );
}

function AddCriterion({ set, onAdd }: { readonly set: LimitSet; readonly onAdd: (criterion: CriterionId) => void }) {
  const missing = CRITERIA.filter(
    ({ id, modes }) => modes.includes(set.mode) && !set.limits.some(({ criterion }) => criterion === id),
  );
  if (missing.length === 0) return null;
  return (
    <label class="row">
      Add a criterion
      <select
        value=""
        onChange={(e) => {
          const criterion = missing.find(({ id }) => id === e.currentTarget.value);
          if (criterion !== undefined) onAdd(criterion.id);
        }}
      >
        <option value="">choose</option>
        {missing.map(({ id, name, unit }) => (
          <option key={id} value={id}>
            {name} {unitText(unit)}
          </option>
        ))}
      </select>
    </label>
  );
}

function blank(criterion: CriterionId): Limits[number] {
  return { criterion, bands: [{ normal: null, exceptional: null }], source: OPERATOR };
}

/** The limits with one value changed, its source then being the operator; null when the text is no number. */
function withValue(
  limits: Limits,
  index: number,
  bandIndex: number,
  tier: 'normal' | 'exceptional',
  text: string,
): Limits | null {
  const value = text.trim() === '' ? null : Number(text.replace(',', '.'));
  if (value !== null && !Number.isFinite(value)) return null;
  return limits.map((limit, i) =>
    i !== index
      ? limit
      : {
          ...limit,
          bands: limit.bands.map((band, j) => (j === bandIndex ? { ...band, [tier]: value } : band)),
          source: OPERATOR,
        },
  );
}

async function save(set: LimitSet): Promise<void> {
  try {
    await api.putLimitSet(set);
    await refreshCatalogue();
    notify(`“${set.name}” is saved`);
  } catch (error) {
    report(error);
  }
}
