import { useState } from 'preact/hooks';
import { keep, readKept } from '../parts/kept.ts';

/** What the user wrote about a curve: kept in this browser, printed with the sheet. */
export function Notes({ runId, number }: { readonly runId: string; readonly number: number }) {
  const key = `note.${runId}.${String(number)}`;
  const [text, setText] = useState(() => readKept(key, ''));
  return (
    <section class="whole">
      <h3>
        <label for="curve-notes">Notes</label>
      </h3>
      <textarea
        id="curve-notes"
        class="no-print"
        rows={3}
        value={text}
        placeholder="Kept in this browser and printed with the sheet"
        onInput={(e) => {
          setText(e.currentTarget.value);
          keep(key, e.currentTarget.value === '' ? null : e.currentTarget.value);
        }}
      />
      <p class="print-only note-text">{text === '' ? 'None.' : text}</p>
    </section>
  );
}
