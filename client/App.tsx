import { useEffect, useRef, useState } from 'preact/hooks';
import { Desk } from './desk/Desk.tsx';
import { preparePrinting } from './desk/PrintTable.tsx';
import { LimitSets } from './setup/LimitSets.tsx';
import { Recordings } from './setup/Recordings.tsx';
import { Registers } from './setup/Registers.tsx';
import { Units } from './setup/Units.tsx';
import { Vehicles } from './setup/Vehicles.tsx';
import { HelpCard } from './shell/HelpCard.tsx';
import { closeMenusOutside } from './shell/menus.ts';
import { Messages } from './shell/Messages.tsx';
import { followKeys } from './shell/shortcuts.ts';
import { TopBar } from './shell/TopBar.tsx';
import { ConfirmDialog } from './parts/confirm.tsx';
import { app, type View } from './state/app-state.ts';
import { useSlice } from './state/observable.ts';
import { addFiles } from './state/uploads.ts';

/** The page: bar, one screen, the caution that never goes away; files may be dropped anywhere. */
export function App() {
  const view = useSlice(app, (s) => s.view);
  const theme = useSlice(app, (s) => s.theme);
  const title = useSlice(app, (s) => titleOf(s.view, s.open?.detail.summary.name ?? null, s.curve));
  const [dropping, setDropping] = useState(false);
  const help = useRef<HTMLDialogElement>(null);
  const showHelp = () => help.current?.showModal();
  useEffect(() => {
    document.documentElement.dataset.theme = theme;
  }, [theme]);
  useEffect(() => {
    document.title = title;
  }, [title]);
  useEffect(() => preparePrinting(), []);
  useEffect(() => closeMenusOutside(), []);
  useEffect(() => followKeys(showHelp), []);
  return (
    <div
      class={`shell${dropping ? ' dropping' : ''}`}
      onDragOver={(e) => {
        if (e.dataTransfer?.types.includes('Files') !== true) return;
        e.preventDefault();
        setDropping(true);
      }}
      onDragLeave={(e) => {
        if (e.relatedTarget === null) setDropping(false);
      }}
      onDrop={(e) => {
        e.preventDefault();
        setDropping(false);
        addFiles([...(e.dataTransfer?.files ?? [])]);
      }}
    >
      <a class="skip" href="#main">
        To the content
      </a>
      <TopBar onHelp={showHelp} />
      <main id="main" tabIndex={-1} class={view === 'desk' ? 'desk-screen' : 'page'} key={view}>
        <Screen view={view} />
      </main>
      <footer class="caution-line">
        Derived from GPS: no track-geometry measurement, no ride test. The operator’s and the regulator’s own limits
        govern; speed and cant are decided by the competent, authorised people of the line.
      </footer>
      <Messages />
      <HelpCard dialog={help} />
      <ConfirmDialog />
    </div>
  );
}

function Screen({ view }: { readonly view: View }) {
  switch (view) {
    case 'desk':
      return <Desk />;
    case 'recordings':
      return <Recordings />;
    case 'limits':
      return <LimitSets />;
    case 'vehicles':
      return <Vehicles />;
    case 'registers':
      return <Registers />;
    case 'units':
      return <Units />;
  }
}

const TITLES: Readonly<Record<Exclude<View, 'desk'>, string>> = {
  recordings: 'Recordings',
  limits: 'Limit sets',
  vehicles: 'Vehicles',
  registers: 'Cant registers',
  units: 'Units',
};

function titleOf(view: View, run: string | null, curve: number | null): string {
  if (view !== 'desk') return `${TITLES[view]} – Bendbook`;
  if (run === null) return 'Bendbook';
  return `${curve === null ? '' : `Curve ${String(curve)}, `}${run} – Bendbook`;
}
