import { render } from 'preact';
import { App } from './App.tsx';
import './theme.css';
import './shell/shell.css';
import './desk/desk.css';
import './plan/plan.css';
import './band/band.css';
import './ledger/ledger.css';
import './sheet/sheet.css';
import './setup/setup.css';
import './print.css';
import { followAddress } from './state/address.ts';
import { keepHabits } from './state/app-state.ts';
import { start } from './state/server.ts';

keepHabits();
followAddress();
render(<App />, document.getElementById('app')!);
void start();
