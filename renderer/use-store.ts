/** Reading of the store from components. */
import { createContext, use, useSyncExternalStore } from 'react';
import type { Controller } from './controller.ts';
import type { State } from './store.ts';

export const ControllerContext = createContext<Controller | null>(null);

export function useController(): Controller {
  const controller = use(ControllerContext);
  if (!controller) throw new Error('a panel stands outside the window');
  return controller;
}

export function useAppState(): State {
  const { store } = useController();
  return useSyncExternalStore(store.subscribe, store.get);
}
