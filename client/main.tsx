import { render } from 'preact';
import { App } from './App.tsx';
import './theme.css';
import './layout.css';
import { start } from './state/app-state.ts';
import { followAddress } from './state/address.ts';

followAddress();
render(<App />, document.getElementById('app')!);
void start();
