import { useRef } from 'preact/hooks';
import { Band } from '../band/Band.tsx';
import { Ledger } from '../ledger/Ledger.tsx';
import { Plan } from '../plan/Plan.tsx';
import { Sheet } from '../sheet/Sheet.tsx';
import { app, type Tab } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { Headline } from './Headline.tsx';
import { layOut, Splitter } from './Splitter.tsx';
import { Welcome } from './Welcome.tsx';

const TABS: readonly (readonly [tab: Tab, label: string])[] = [
  ['ledger', 'Ledger'],
  ['plan', 'Plan'],
  ['band', 'Band'],
  ['sheet', 'Curve'],
];

/** The three views of the line and the sheet of the chosen curve; on a narrow screen one of them at a time. */
export function Desk() {
  const open = useSlice(app, (s) => s.open);
  const curve = useSlice(app, (s) => s.curve);
  const wanted = useSlice(app, (s) => s.tab);
  const runId = useSlice(app, (s) => s.runId);
  const loaded = useSlice(app, (s) => s.loaded);
  const desk = useRef<HTMLDivElement>(null);
  if (open === null) {
    if (loaded && runId === null) return <Welcome />;
    return (
      <p class="opening" role="status">
        {loaded ? 'Opening the run …' : 'Starting …'}
      </p>
    );
  }
  const tab = wanted === 'sheet' && curve === null ? 'ledger' : wanted;
  const area = (name: Tab) => `area area-${name}${tab === name ? ' shown' : ''}`;
  return (
    <>
      <h1 class="sr">{open.detail.summary.name}</h1>
      <Headline open={open} />
      <div
        class={`desk${curve === null ? '' : ' with-sheet'}`}
        ref={(el) => {
          desk.current = el;
          if (el !== null) layOut(el);
        }}
      >
        <div class="tabs" role="group" aria-label="View">
          {TABS.map(([name, label]) => (
            <button
              key={name}
              type="button"
              aria-pressed={tab === name}
              disabled={name === 'sheet' && curve === null}
              onClick={() => app.set({ tab: name })}
            >
              {name === 'sheet' && curve !== null ? `${label} ${String(curve)}` : label}
            </button>
          ))}
        </div>
        <div class={area('plan')}>
          <Plan open={open} />
        </div>
        <div class={area('band')}>
          <Band open={open} />
        </div>
        <div class={area('ledger')}>
          <Ledger open={open} />
        </div>
        {curve !== null && (
          <aside class={area('sheet')} aria-label="Curve sheet" tabIndex={-1}>
            <Sheet key={open.detail.summary.id + String(curve)} open={open} number={curve} />
          </aside>
        )}
        <Splitter desk={desk} pane="column" label="Width of Plan beside Band" />
        <Splitter desk={desk} pane="row" label="Height of Plan and Band above the ledger" />
        {curve !== null && <Splitter desk={desk} pane="sheet" label="Width of the curve sheet" />}
      </div>
    </>
  );
}
