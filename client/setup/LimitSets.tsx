import { useState } from 'preact/hooks';
import { BendbookError } from '../../shared/model/fault.ts';
import type { LimitSet } from '../../shared/schema/limit-set.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.tsx';
import { saveText } from '../parts/save.ts';
import { app, notify, report, showFault } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { changeSetup, refreshCatalogue } from '../state/open-run.ts';
import { Chooser } from './Chooser.tsx';
import { LimitComparison } from './LimitComparison.tsx';
import { LimitTable } from './LimitTable.tsx';

/** Limit sets: every value with its source; copies are the user's to change. */
export function LimitSets() {
  const catalogue = useSlice(app, (s) => s.catalogue);
  const open = useSlice(app, (s) => s.open);
  const [chosen, setChosen] = useState<string | null>(open?.setup.limits.id ?? null);
  const [other, setOther] = useState('');
  if (catalogue === null) return null;
  const sets = catalogue.limitSets;
  const set = sets.find(({ id }) => id === chosen) ?? sets[0]!;
  const against = sets.find(({ id, mode }) => id === other && mode === set.mode);
  const choose = (id: string) => {
    setChosen(id);
    if (id === other) setOther('');
  };
  return (
    <div class="column">
      <header class="page-head">
        <div>
          <h1>Limit sets</h1>
          <p class="quiet-text">
            The sets that come with the program are starting points: the operator’s, the regulator’s and local rules
            govern. Copy one and put in your own values and sources.
          </p>
        </div>
        <label class="button">
          Import a set
          <input
            class="sr"
            type="file"
            accept=".json"
            onChange={(e) => {
              void importSet(e.currentTarget.files?.[0], sets).then((id) => {
                if (id !== null) choose(id);
              });
              e.currentTarget.value = '';
            }}
          />
        </label>
      </header>
      <div class="with-chooser">
        <Chooser label="Limit sets" items={sets} chosen={set.id} onChoose={choose} />
        <section class="card" aria-labelledby="set-name">
          <div class="row">
            <h2 id="set-name" class="grow">
              {set.name}
            </h2>
            {open?.ref.mode === set.mode && open.setup.limits.id !== set.id && (
              <button
                type="button"
                onClick={() =>
                  void changeSetup({ limitSetId: set.id }).then(() => notify('The open run is judged by this set'))
                }
              >
                Judge the open run by it
              </button>
            )}
            <button type="button" onClick={() => void copySet(set).then(choose).catch(report)}>
              Copy
            </button>
            <button
              type="button"
              onClick={() => saveText(`${set.id}.json`, JSON.stringify(withoutMark(set), null, 2), 'application/json')}
            >
              Export
            </button>
            {!set.builtIn && (
              <button type="button" onClick={() => void deleteSet(set)}>
                Delete
              </button>
            )}
          </div>
          <p>{set.appliesTo}</p>
          <label class="row">
            Compare with
            <select value={against?.id ?? ''} onChange={(e) => setOther(e.currentTarget.value)}>
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
          {against === undefined ? (
            <LimitTable key={JSON.stringify(set)} set={set} editable={!set.builtIn} />
          ) : (
            <LimitComparison a={set} b={against} />
          )}
          {set.cautions.length > 0 && (
            <ul class="quiet-text">
              {set.cautions.map((caution) => (
                <li key={caution}>{caution}</li>
              ))}
            </ul>
          )}
        </section>
      </div>
    </div>
  );
}

type Listed = LimitSet & { readonly builtIn: boolean };

function withoutMark(set: Listed): LimitSet {
  const plain: LimitSet & { builtIn?: boolean } = { ...set };
  delete plain.builtIn;
  return plain;
}

async function copySet(set: Listed): Promise<string> {
  const id = `own-${crypto.randomUUID().slice(0, 8)}`;
  await api.putLimitSet({ ...withoutMark(set), id, name: `${set.name}, our copy` });
  await refreshCatalogue();
  return id;
}

async function deleteSet(set: Listed): Promise<void> {
  if (!(await confirmAction(`Delete the limit set “${set.name}”? This cannot be undone.`, 'Delete it'))) return;
  try {
    await api.removeLimitSet(set.id);
    await refreshCatalogue();
    notify(`“${set.name}” is deleted`);
  } catch (error) {
    report(error);
  }
}

/** Reads and keeps a file; an id that belongs to a shipped set is changed. Null when it is refused. */
async function importSet(file: File | undefined, sets: readonly Listed[]): Promise<string | null> {
  if (file === undefined) return null;
  try {
    // Loaded when needed: checking a file needs the whole schema library.
    const { parseLimitSet } = await import('../../shared/limits/parse.ts');
    const read = parseLimitSet(await file.text(), file.name);
    const isTaken = sets.some(({ id, builtIn }) => builtIn && id === read.id);
    const kept = isTaken ? { ...read, id: `${read.id}-imported` } : read;
    await api.putLimitSet(kept);
    await refreshCatalogue();
    notify(`“${kept.name}” is imported`);
    return kept.id;
  } catch (error) {
    if (error instanceof BendbookError) showFault({ ...error.fault, place: { ...error.fault.place } });
    else report(error);
    return null;
  }
}
