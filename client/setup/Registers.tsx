import { useState } from 'preact/hooks';
import type { CantRegister } from '../../shared/schema/cant-register.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.tsx';
import { Findings } from '../parts/Findings.tsx';
import { saveText } from '../parts/save.ts';
import { counted, figure } from '../parts/text.ts';
import { app, notify, report } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { changeSetup, refreshCatalogue } from '../state/open-run.ts';
import { useDraft } from './use-draft.ts';

const TEMPLATE = 'from_m,to_m,cant_mm,note\n1200,1580,90,made-up example\n2310,2495,45,made-up example\n';

/** Cant registers: a CSV by chainage, by places or by curve numbers, laid on the run by offset, stretch and direction. */
export function Registers() {
  const catalogue = useSlice(app, (s) => s.catalogue);
  const [added, setAdded] = useState<{ name: string; findings: Parameters<typeof Findings>[0]['findings'] } | null>(
    null,
  );
  if (catalogue === null) return null;
  const add = async (file: File | undefined) => {
    if (file === undefined) return;
    try {
      const answer = await api.addRegister(file.name, await file.text());
      setAdded({ name: answer.name, findings: answer.findings });
      await refreshCatalogue();
      notify(`“${answer.name}” is added with ${counted(answer.entries.length, 'row')}`);
    } catch (error) {
      report(error);
    }
  };
  return (
    <div class="column">
      <header class="page-head">
        <div>
          <h1>Cant registers</h1>
          <p class="quiet-text">
            A CSV with one row a curve: by chainage (<code>from_m, to_m, cant_mm</code>), by places (
            <code>from_lat, from_lon, to_lat, to_lon, cant_mm</code>) or by number (<code>curve, cant_mm</code>); for
            roads <code>superelevation_pct</code>. Cant that no row gives stays unknown, never zero.
          </p>
        </div>
        <div class="row">
          <button type="button" onClick={() => saveText('cant-register.csv', TEMPLATE, 'text/csv')}>
            Empty form
          </button>
          <label class="button primary">
            Add a register
            <input
              class="sr"
              type="file"
              accept=".csv,.txt,.tsv"
              onChange={(e) => {
                void add(e.currentTarget.files?.[0]);
                e.currentTarget.value = '';
              }}
            />
          </label>
        </div>
      </header>
      {added !== null && added.findings.length > 0 && (
        <section class="card" aria-label="Findings">
          <h2>Noticed in {added.name}</h2>
          <Findings findings={added.findings} />
        </section>
      )}
      {catalogue.registers.length === 0 && (
        <p class="nothing">
          No register yet. Without one, cant is unknown: figures then hold for zero cant, as upper bounds, and say which
          cant would be needed.
        </p>
      )}
      {catalogue.registers.map((register) => (
        <Register key={JSON.stringify(register)} register={register} />
      ))}
    </div>
  );
}

function Register({ register }: { readonly register: CantRegister }) {
  const open = useSlice(app, (s) => s.open);
  const { draft, isChanged, setDraft, undo } = useDraft(register);
  const isUsed = open?.ref.registerId === register.id;
  const isRail = register.entries.some(({ cantMm }) => cantMm !== undefined);
  const against = draft.stretch < 0;
  const save = async () => {
    try {
      await api.putRegister(draft);
      await refreshCatalogue();
      notify(`“${draft.name}” is saved`);
    } catch (error) {
      report(error);
    }
  };
  const remove = async () => {
    if (!(await confirmAction(`Delete the register “${register.name}”? This cannot be undone.`, 'Delete it'))) return;
    try {
      await api.removeRegister(register.id);
      await refreshCatalogue();
      notify(`“${register.name}” is deleted`);
    } catch (error) {
      report(error);
    }
  };
  return (
    <section class="card" aria-label={register.name}>
      <div class="row">
        <h2 class="grow">{register.name}</h2>
        {open !== null && (
          <button
            type="button"
            disabled={isUsed}
            onClick={() =>
              void changeSetup({ registerId: register.id }).then(() => notify('The open run takes its cant from it'))
            }
          >
            {isUsed ? 'In use for the open run' : 'Use it for the open run'}
          </button>
        )}
        <button type="button" onClick={() => void remove()}>
          Delete
        </button>
      </div>
      <form
        class="row register-place"
        onSubmit={(e) => {
          e.preventDefault();
          void save();
        }}
      >
        <label>
          Chainage where the run begins, m
          <input
            type="number"
            step="any"
            class="num"
            value={draft.offsetM}
            onChange={(e) => {
              const offsetM = e.currentTarget.valueAsNumber;
              if (Number.isFinite(offsetM)) setDraft({ ...draft, offsetM });
            }}
          />
        </label>
        <label>
          Direction
          <select
            value={against ? 'against' : 'with'}
            onChange={(e) =>
              setDraft({ ...draft, stretch: Math.abs(draft.stretch) * (e.currentTarget.value === 'against' ? -1 : 1) })
            }
          >
            <option value="with">counts with the run</option>
            <option value="against">counts against the run</option>
          </select>
        </label>
        <label>
          Stretch
          <input
            type="number"
            step="any"
            min="0.5"
            max="2"
            class="num"
            value={Math.abs(draft.stretch)}
            onChange={(e) => {
              const size = e.currentTarget.valueAsNumber;
              if (size > 0) setDraft({ ...draft, stretch: against ? -size : size });
            }}
          />
        </label>
        <button type="submit" class="primary" disabled={!isChanged}>
          Save
        </button>
        <button type="button" disabled={!isChanged} onClick={undo}>
          Undo
        </button>
      </form>
      <details>
        <summary>{counted(register.entries.length, 'row')}</summary>
        <div class="scroll-x" tabIndex={0} role="region" aria-label={`Rows of ${register.name}`}>
          <table class="plain figures">
            <thead>
              <tr>
                <th scope="col" class="num">
                  From, m
                </th>
                <th scope="col" class="num">
                  To, m
                </th>
                <th scope="col">From place</th>
                <th scope="col" class="num">
                  Curve
                </th>
                <th scope="col" class="num">
                  {isRail ? 'Cant, mm' : 'Superelevation, %'}
                </th>
                <th scope="col">Note</th>
              </tr>
            </thead>
            <tbody>
              {register.entries.map((entry, i) => (
                <tr key={i}>
                  <td class="num">{figure(entry.fromM, 0)}</td>
                  <td class="num">{figure(entry.toM, 0)}</td>
                  <td>
                    {entry.fromLatDeg === undefined || entry.fromLonDeg === undefined
                      ? '–'
                      : `${figure(entry.fromLatDeg, 5)}, ${figure(entry.fromLonDeg, 5)}`}
                  </td>
                  <td class="num">{entry.curve ?? '–'}</td>
                  <td class="num">{isRail ? figure(entry.cantMm, 0) : figure(entry.superelevationPct, 1)}</td>
                  <td>{entry.note}</td>
                </tr>
              ))}
            </tbody>
          </table>
        </div>
      </details>
    </section>
  );
}
