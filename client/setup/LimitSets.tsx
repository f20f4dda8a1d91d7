import { useState } from 'preact/hooks';
import { compareLimitSets } from '../../shared/limits/compare.ts';
import { CRITERIA } from '../../shared/limits/criteria.ts';
import { BendbookError } from '../../shared/model/fault.ts';
import type { LimitSet } from '../../shared/schema/limit-set.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.ts';
import { saveText } from '../parts/save.ts';
import { criterionName, figure, unitText } from '../parts/text.ts';
import { app, refreshCatalogue, report } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

/** Limit sets: every value with its source; copies are the user's to change. */
export function LimitSets() {
  const catalogue = useSlice(app, (s) => s.catalogue);
  const [chosen, setChosen] = useState<string | null>(null);
  const [other, setOther] = useState('');
  if (catalogue === null) return <main class="page" />;
  const sets = catalogue.limitSets;
  const set = sets.find(({ id }) => id === chosen) ?? sets[0]!;
  const against = sets.find(({ id }) => id === other);
  const importFile = async (file: File | undefined) => {
    if (file === undefined) return;
    try {
      // Loaded when needed: checking a file needs the whole schema library.
      const { parseLimitSet } = await import('../../shared/limits/parse.ts');
      const read = parseLimitSet(await file.text(), file.name);
      const taken = sets.some(({ id, builtIn }) => builtIn && id === read.id);
      await api.putLimitSet(taken ? { ...read, id: `${read.id}-imported` } : read);
      await refreshCatalogue();
    } catch (error) {
      if (error instanceof BendbookError)
        app.set({ faults: [...app.get().faults, { ...error.fault, place: { ...error.fault.place } }] });
      else report(error);
    }
  };
  const copy = async () => {
    const id = `own-${crypto.randomUUID().slice(0, 8)}`;
    const { builtIn: _builtIn, ...rest } = set;
    await api.putLimitSet({ ...rest, id, name: `${set.name}, our copy` });
    await refreshCatalogue();
    setChosen(id);
  };
  return (
    <main class="page">
      <div class="column">
        <div class="row">
          <h1 class="grow">Limit sets</h1>
          <label class="button">
            Import
            <input
              class="sr"
              type="file"
              accept=".json"
              onChange={(e) => void importFile(e.currentTarget.files?.[0])}
            />
          </label>
        </div>
        <p>
          Sets that come with the program are starting points: the operator's, the regulator's and local rules govern.
          Copy one, put in your own values and sources, and choose it in the header of a run.
        </p>
        <section class="card">
          <div class="row">
            <label class="grow">
              <span class="sr">Limit set</span>
              <select value={set.id} onChange={(e) => setChosen(e.currentTarget.value)}>
                {sets.map((s) => (
                  <option key={s.id} value={s.id}>
                    {s.name} ({s.mode}
                    {s.builtIn ? '' : ', own'})
                  </option>
                ))}
              </select>
            </label>
            <label>
              Compare with{' '}
              <select value={other} onChange={(e) => setOther(e.currentTarget.value)}>
                <option value="">nothing</option>
                {sets
                  .filter((s) => s.mode === set.mode && s.id !== set.id)
                  .map((s) => (
                    <option key={s.id} value={s.id}>
                      {s.name}
                    </option>
                  ))}
              </select>
            </label>
            <button type="button" onClick={() => void copy().catch(report)}>
              Copy
            </button>
            <button
              type="button"
              onClick={() => saveText(`${set.id}.json`, JSON.stringify(set, null, 2), 'application/json')}
            >
              Export
            </button>
            {!set.builtIn && (
              <button
                type="button"
                onClick={() => {
                  if (confirmAction(`Delete "${set.name}"?`))
                    void api.removeLimitSet(set.id).then(refreshCatalogue).catch(report);
                }}
              >
                Delete
              </button>
            )}
          </div>
          <p>{set.appliesTo}</p>
          {against !== undefined ? (
            <Comparison a={set} b={against} />
          ) : (
            <LimitTable key={set.id} set={set} editable={!set.builtIn} />
          )}
          {set.cautions.map((caution) => (
            <p key={caution} class="quiet-text">
              {caution}
            </p>
          ))}
        </section>
      </div>
    </main>
  );
}

function LimitTable({ set, editable }: { readonly set: LimitSet; readonly editable: boolean }) {
  const [draft, setDraft] = useState(set);
  const change = (k: number, b: number, tier: 'normal' | 'exceptional', text: string) => {
    const value = text.trim() === '' ? null : Number(text);
    if (value !== null && !Number.isFinite(value)) return;
    const limits = draft.limits.map((limit, i) =>
      i !== k
        ? limit
        : {
            ...limit,
            bands: limit.bands.map((band, j) => (j === b ? { ...band, [tier]: value } : band)),
            source: { document: 'operator', clause: '', year: null, status: 'operator' as const },
          },
    );
    setDraft({ ...draft, limits });
  };
  const dirty = draft !== set;
  return (
    <>
      {editable && (
        <div class="row">
          <label class="grow">
            Name{' '}
            <input
              type="text"
              value={draft.name}
              onInput={(e) => setDraft({ ...draft, name: e.currentTarget.value })}
            />
          </label>
          <button
            type="button"
            class="primary"
            disabled={!dirty}
            onClick={() => void api.putLimitSet(draft).then(refreshCatalogue).catch(report)}
          >
            Save changes
          </button>
          <button type="button" disabled={!dirty} onClick={() => setDraft(set)}>
            Undo
          </button>
        </div>
      )}
      <div class="scroll-x">
        <table class="plain">
          <thead>
            <tr>
              <th>Criterion</th>
              <th>Applies</th>
              <th class="num">Normal</th>
              <th class="num">Exceptional</th>
              <th>Unit</th>
              <th>Source</th>
            </tr>
          </thead>
          <tbody>
            {draft.limits.flatMap((limit, k) =>
              limit.bands.map((band, b) => (
                <tr key={`${limit.criterion}-${String(b)}`}>
                  <td>{b === 0 ? criterionName(limit.criterion) : ''}</td>
                  <td>{bandText(band)}</td>
                  {(['normal', 'exceptional'] as const).map((tier) => (
                    <td class="num" key={tier}>
                      {editable ? (
                        <input
                          type="text"
                          inputMode="decimal"
                          size={7}
                          class="num"
                          aria-label={`${criterionName(limit.criterion)}, ${tier}`}
                          defaultValue={band[tier]?.toString() ?? ''}
                          onChange={(e) => change(k, b, tier, e.currentTarget.value)}
                        />
                      ) : (
                        figure(band[tier], 2).replace(/\.?0+$/, '')
                      )}
                    </td>
                  ))}
                  <td>{unitText(CRITERIA.find(({ id }) => id === limit.criterion)?.unit ?? '')}</td>
                  <td>
                    {limit.source.document}
                    {limit.source.clause === '' ? '' : `, ${limit.source.clause}`}
                    {limit.source.year === null ? '' : `, ${String(limit.source.year)}`}{' '}
                    <span class="quiet-text">
                      {limit.source.status === 'memory' ? 'recalled, not read: check' : limit.source.status}
                    </span>
                  </td>
                </tr>
              )),
            )}
          </tbody>
        </table>
      </div>
    </>
  );
}

function bandText(band: LimitSet['limits'][number]['bands'][number]): string {
  const parts = [];
  if (band.minSpeedKmh !== undefined) parts.push(`from ${String(band.minSpeedKmh)} km/h`);
  if (band.maxSpeedKmh !== undefined) parts.push(`to ${String(band.maxSpeedKmh)} km/h`);
  if (band.minRadiusM !== undefined) parts.push(`R from ${String(band.minRadiusM)} m`);
  if (band.maxRadiusM !== undefined) parts.push(`R to ${String(band.maxRadiusM)} m`);
  return parts.length === 0 ? 'always' : parts.join(', ');
}

/** Both sets side by side; rows that differ are marked in words as well as by weight. */
function Comparison({ a, b }: { readonly a: LimitSet; readonly b: LimitSet }) {
  const text = (entry: ReturnType<typeof compareLimitSets>[number]['first']) =>
    entry === null
      ? 'no value'
      : entry.bands
          .map((band) => `${bandText(band)}: ${figure(band.normal, 2)} / ${figure(band.exceptional, 2)}`)
          .join('; ');
  return (
    <div class="scroll-x">
      <table class="plain">
        <thead>
          <tr>
            <th>Criterion</th>
            <th>{a.name}, normal / exceptional</th>
            <th>{b.name}, normal / exceptional</th>
            <th />
          </tr>
        </thead>
        <tbody>
          {compareLimitSets(a, b).map(({ criterion, first, second, same }) => (
            <tr key={criterion}>
              <td>{criterionName(criterion)}</td>
              <td title={first?.source}>{text(first)}</td>
              <td title={second?.source}>{text(second)}</td>
              <td>{same ? 'same' : <strong>differs</strong>}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
