/** The start of the window. */
import './style.css';
import { createRoot } from 'react-dom/client';
import { App } from './app.tsx';
import { Controller } from './controller.ts';
import { getHost } from './get-host.ts';
import { Store } from './store.ts';

const store = new Store();
const controller = new Controller(store, getHost());
const root = document.querySelector('#root');
if (!root) throw new Error('the page has no place for the window');
createRoot(root).render(<App controller={controller} />);
controller.start().catch((error: unknown) => {
  store.dispatch({ type: 'problem', message: error instanceof Error ? error.message : String(error) });
});
