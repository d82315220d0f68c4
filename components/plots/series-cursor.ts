import { createContext, useContext, useSyncExternalStore } from 'react';

/**
 * The one cursor that all panels, the axis and the inspector share. It lives outside of React's state so that moving it redraws the
 * overlays only. What the pointer is over shows while it is there; what was chosen by click, key or touch stays when it leaves.
 */
export interface SeriesCursor {
  /** Start of the period that shows the cursor [ms UTC]; null for none. */
  shownMs: () => number | null;
  chosenMs: () => number | null;
  hover: (startMs: number | null) => void;
  choose: (startMs: number | null) => void;
  /** Chooses only where nobody has chosen yet. */
  propose: (startMs: number | null) => void;
  isTouched: () => boolean;
  subscribe: (listener: () => void) => () => void;
}

export function createSeriesCursor(chosenAtFirst: number | null = null): SeriesCursor {
  let hovered: number | null = null;
  let chosen = chosenAtFirst;
  let touched = chosenAtFirst !== null;
  const listeners = new Set<() => void>();
  const shownMs = () => hovered ?? chosen;
  const change = (apply: () => void) => {
    const before = shownMs();
    apply();
    if (shownMs() !== before) for (const listener of listeners) listener();
  };
  return {
    shownMs,
    chosenMs: () => chosen,
    hover: (startMs) => change(() => (hovered = startMs)),
    choose: (startMs) => {
      touched = true;
      change(() => {
        chosen = startMs;
        hovered = null;
      });
    },
    propose: (startMs) => {
      if (!touched) change(() => (chosen = startMs));
    },
    isTouched: () => touched,
    subscribe: (listener) => {
      listeners.add(listener);
      return () => listeners.delete(listener);
    },
  };
}

export const SeriesCursorContext = createContext<SeriesCursor>(createSeriesCursor());

export function useSeriesCursor(): SeriesCursor {
  return useContext(SeriesCursorContext);
}

/** Start of the period under the cursor [ms UTC]; redraws its component when that changes. */
export function useCursorMs(): number | null {
  const cursor = useSeriesCursor();
  return useSyncExternalStore(cursor.subscribe, cursor.shownMs, () => null);
}
