import { useState } from 'preact/hooks';
import type { CantRegister } from '../../shared/schema/cant-register.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.ts';
import { Findings } from '../parts/Findings.tsx';
import { figure } from '../parts/text.ts';
import { app, refreshCatalogue, report } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

/** Cant registers: a CSV by chainage, by places or by curve numbers, laid on the run by offset, stretch and direction. */
export function Registers() {
  const catalogue = useSlice(app, (s) => s.catalogue);
  const [findings, setFindings] = useState<Parameters<typeof Findings>[0]['findings'] | null>(null);
  if (catalogue === null) return <main class="page" />;
  const add = async (file: File | undefined) => {
    if (file === undefined) return;
    try {
      const answer = await api.addRegister(file.name, await file.text());
      setFindings(answer.findings);
      await refreshCatalogue();
    } catch (error) {
      report(error);
    }
  };
  return (
    <main class="page">
      <div class="column">
        <div class="row">
          <h1 class="grow">Cant registers</h1>
          <label class="button">
            Add a CSV
            <input
              class="sr"
              type="file"
              accept=".csv,.txt,.tsv"
              onChange={(e) => void add(e.currentTarget.files?.[0])}
            />
          </label>
        </div>
        <p>
          Rows by chainage (<code>from_m,to_m,cant_mm</code>), by places (
          <code>from_lat,from_lon,to_lat,to_lon,cant_mm</code>) or by curve number (<code>curve,cant_mm</code>); for
          roads <code>superelevation_pct</code>. Cant that no row gives stays unknown.
        </p>
        {findings !== null && <Findings findings={findings} />}
        {catalogue.registers.length === 0 && <p class="quiet-text">No register yet.</p>}
        {catalogue.registers.map((register) => (
          <Register key={register.id} register={register} />
        ))}
      </div>
    </main>
  );
}

function Register({ register }: { readonly register: CantRegister }) {
  const [draft, setDraft] = useState(register);
  const number = (text: string, fallback: number) =>
    Number.isFinite(Number(text)) && text.trim() !== '' ? Number(text) : fallback;
  return (
    <section class="card" aria-label={register.name}>
      <div class="row">
        <h2 class="grow">{register.name}</h2>
        <button
          type="button"
          onClick={() => {
            if (confirmAction(`Delete the register "${register.name}"?`))
              void api.removeRegister(register.id).then(refreshCatalogue).catch(report);
          }}
        >
          Delete
        </button>
      </div>
      <form
        class="row"
        onSubmit={(e) => {
          e.preventDefault();
          void api.putRegister(draft).then(refreshCatalogue).catch(report);
        }}
      >
        <span>register chainage =</span>
        <input
          type="text"
          inputMode="decimal"
          size={9}
          class="num"
          aria-label="Offset in metres"
          defaultValue={String(draft.offsetM)}
          onChange={(e) => setDraft({ ...draft, offsetM: number(e.currentTarget.value, draft.offsetM) })}
        />
        <span>m +</span>
        <input
          type="text"
          inputMode="decimal"
          size={9}
          class="num"
          aria-label="Stretch; negative for the opposite direction"
          defaultValue={String(draft.stretch)}
          onChange={(e) => setDraft({ ...draft, stretch: number(e.currentTarget.value, draft.stretch) || 1 })}
        />
        <span>× run chainage</span>
        <button type="submit" disabled={draft === register}>
          Save
        </button>
      </form>
      <details>
        <summary>{register.entries.length} rows</summary>
        <div class="scroll-x">
          <table class="plain">
            <thead>
              <tr>
                <th class="num">From m</th>
                <th class="num">To m</th>
                <th class="num">Curve</th>
                <th class="num">Cant mm</th>
                <th class="num">Superelevation %</th>
                <th>Note</th>
              </tr>
            </thead>
            <tbody>
              {register.entries.map((entry, i) => (
                <tr key={i}>
                  <td class="num">{figure(entry.fromM ?? null, 0)}</td>
                  <td class="num">{figure(entry.toM ?? null, 0)}</td>
                  <td class="num">{entry.curve ?? '–'}</td>
                  <td class="num">{figure(entry.cantMm ?? null, 0)}</td>
                  <td class="num">{figure(entry.superelevationPct ?? null, 1)}</td>
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
