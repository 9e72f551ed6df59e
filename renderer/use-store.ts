/** Reading of the store from components, each of them hearing only of what it shows. */
import { createContext, use, useEffect, useRef, useState, useSyncExternalStore } from 'react';
import type { Controller } from './controller.ts';
import type { State } from './store.ts';

export const ControllerContext = createContext<Controller | null>(null);

export function useController(): Controller {
  const controller = use(ControllerContext);
  if (!controller) throw new Error('a panel stands outside the window');
  return controller;
}

/** Some fields of the state; the component is drawn again only when one of them changes. */
export function useAppState<K extends keyof State>(...keys: readonly K[]): Pick<State, K> {
  const { store } = useController();
  const kept = useRef<State | null>(null);
  return useSyncExternalStore(store.subscribe, () => {
    const now = store.get();
    const before = kept.current;
    if (before && keys.every(key => Object.is(before[key], now[key]))) return before;
    kept.current = now;
    return now;
  });
}

/** A single value worked out of the state; compared as it is. */
export function useDerived<T extends string | number | boolean | null>(read: (state: State) => T): T {
  const { store } = useController();
  return useSyncExternalStore(store.subscribe, () => read(store.get()));
}

/** A value that follows at most so often, ms: for what is costly to draw while a batch runs. */
export function useThrottled<T>(value: T, interval: number): T {
  const [shown, setShown] = useState(value);
  const last = useRef(0);
  useEffect(() => {
    const wait = Math.max(0, last.current + interval - performance.now());
    const timer = setTimeout(() => {
      last.current = performance.now();
      setShown(value);
    }, wait);
    return () => clearTimeout(timer);
  }, [value, interval]);
  return shown;
}
