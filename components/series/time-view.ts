import { useSyncExternalStore } from 'react';

/**
 * The window that a series page shows. It lives outside of React's state so that dragging it redraws spine, panels and words, not the
 * whole page around them.
 */
export interface TimeView {
  get: () => TimeWindow;
  set: (next: TimeWindow) => void;
  change: (next: (before: TimeWindow) => TimeWindow) => void;
  subscribe: (listener: () => void) => () => void;
}

export interface TimeWindow {
  fromMs: number;
  toMs: number;
}

export function createTimeView(first: TimeWindow): TimeView {
  let shown = first;
  const listeners = new Set<() => void>();
  const set = (next: TimeWindow) => {
    if (next.fromMs === shown.fromMs && next.toMs === shown.toMs) return;
    shown = next;
    for (const listener of listeners) listener();
  };
  return {
    get: () => shown,
    set,
    change: (next) => set(next(shown)),
    subscribe: (listener) => {
      listeners.add(listener);
      return () => listeners.delete(listener);
    },
  };
}

export function useTimeWindow(view: TimeView): TimeWindow {
  return useSyncExternalStore(view.subscribe, view.get, view.get);
}
